/** Problems with what was handed in: counted, listed up to a number, each on one line with file, line and what was expected. */

export const LISTED_PROBLEMS = 20

/** Ends the command with exit code 2 after the problems have been printed. */
export class InputError extends Error {
  constructor(readonly problems: readonly string[]) {
    super(problems.join('\n'))
    this.name = 'InputError'
  }
}

/** Collects bad rows of one file. */
export class RowProblems {
  count = 0
  private readonly listed: string[] = []

  constructor(
    private readonly file: string,
    private readonly say: (line: string) => void,
  ) {}

  /** Notes one bad row; `line` counts from 1 with the header as line 1. */
  add(line: number, expected: string): void {
    this.count++
    if (this.listed.length < LISTED_PROBLEMS) {
      const text = `${this.file}:${line}: ${expected}`
      this.listed.push(text)
      this.say(text)
    }
  }

  /** Says how many there were, and refuses the file when more than half of its rows are bad. */
  finish(rows: number): void {
    if (this.count > this.listed.length) {
      this.say(`${this.file}: ${this.count - this.listed.length} more bad rows are not listed`)
    }
    if (this.count * 2 > rows) {
      throw new InputError([
        `${this.file}: ${this.count} of ${rows} rows are bad, more than half: expected mostly readable rows`,
      ])
    }
    if (this.count > 0) this.say(`${this.file}: ${this.count} of ${rows} rows were left out`)
  }
}
