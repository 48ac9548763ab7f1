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

/** A count in words up to twelve, then in figures; five digits and more take a thin space. */
export function countWord(count: number): string {
  return words[count] ?? spaced(count)
}

/** Four-digit numbers stand without a separator (1307); five and more take a thin space (18 240). */
export function spaced(value: number): string {
  const digits = String(Math.round(value))
  return digits.replace('-', '').length < 5 ? digits : digits.replace(/\B(?=(\d{3})+$)/g, '\u2009')
}

/** "one room", "four rooms". */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${countWord(count)} ${count === 1 ? one : many}`
}

/** A sentence begins with a sentenceCase. */
export function sentenceCase(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1)
}

/** "a", "a and b", "a, b and c". */
export function listed(items: readonly string[]): string {
  if (items.length < 2) return items[0] ?? ''
  return `${items.slice(0, -1).join(', ')} and ${items[items.length - 1]}`
}

/** How long, as people say it: "8 s", "42 min", "3 h 20 min", "2 days". */
export function duration(seconds: number): string {
  const whole = Math.max(0, Math.round(seconds))
  if (whole < 60) return `${whole} s`
  const minutes = Math.round(whole / 60)
  if (minutes < 120) return `${minutes} min`
  if (minutes < 48 * 60) {
    const rest = minutes % 60
    return rest === 0 || minutes >= 600
      ? `${Math.round(minutes / 60)} h`
      : `${Math.floor(minutes / 60)} h ${rest} min`
  }
  return `${Math.round(minutes / 1440)} days`
}
