/** On which line of a JSON text a value stands, so that an error can name it. */

/** Line (from 1) of the value at `path` in a valid JSON text; the nearest parent's line where the path does not exist. */
export function lineOfPath(text: string, path: readonly (string | number)[]): number {
  const lines = new Map<string, number>()
  new Scanner(text, lines).value('')
  for (let length = path.length; length >= 0; length--) {
    const found = lines.get(
      path
        .slice(0, length)
        .map((step) => `/${step}`)
        .join(''),
    )
    if (found !== undefined) return found
  }
  return 1
}

/** Line (from 1) at which a JSON text stops being valid, from the parser's own message. */
export function lineOfSyntaxError(text: string, error: unknown): number {
  const at = /position (\d+)/.exec(String(error))
  return at ? text.slice(0, Number(at[1])).split('\n').length : text.trimEnd().split('\n').length
}

class Scanner {
  private at = 0
  private line = 1

  constructor(
    private readonly text: string,
    private readonly lines: Map<string, number>,
  ) {}

  private skipSpace(): void {
    while (this.at < this.text.length && /\s/.test(this.text[this.at]!)) {
      if (this.text[this.at] === '\n') this.line++
      this.at++
    }
  }

  private string(): string {
    const start = this.at++
    while (this.text[this.at] !== '"') this.at += this.text[this.at] === '\\' ? 2 : 1
    return JSON.parse(this.text.slice(start, ++this.at)) as string
  }

  value(path: string): void {
    this.skipSpace()
    this.lines.set(path, this.line)
    const first = this.text[this.at]
    if (first === '{') this.members(path, '}')
    else if (first === '[') this.members(path, ']')
    else if (first === '"') this.string()
    else while (this.at < this.text.length && !/[\s,\]}]/.test(this.text[this.at]!)) this.at++
  }

  private members(path: string, close: string): void {
    this.at++
    for (let index = 0; ; index++) {
      this.skipSpace()
      if (this.text[this.at] === close) break
      let key = String(index)
      if (close === '}') {
        key = this.string()
        this.skipSpace()
        this.at++
      }
      this.value(`${path}/${key}`)
      this.skipSpace()
      if (this.text[this.at] === ',') this.at++
    }
    this.at++
  }
}
