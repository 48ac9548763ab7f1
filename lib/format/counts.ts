const words = [
  'no',
  'one',
  'two',
  'three',
  'four',
  'five',
  'six',
  'seven',
  'eight',
  'nine',
  'ten',
  'eleven',
  'twelve',
]

/** A count as a word up to twelve, as figures beyond: "four", "17". */
export function countWord(count: number): string {
  return words[count] ?? String(count)
}

/** "one room", "four rooms", "no rooms". */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${countWord(count)} ${count === 1 ? one : many}`
}

/** The first letter large. */
export function sentenceCase(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1)
}
