const full = new Intl.DateTimeFormat('en-GB', {
  weekday: 'long',
  day: 'numeric',
  month: 'long',
  timeZone: 'UTC',
})
const short = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short', timeZone: 'UTC' })

/** A building-local date in words: "Monday 16 November". */
export function nightWords(night: string): string {
  return full.format(new Date(`${night}T12:00:00Z`)).replace(',', '')
}

/** A building-local date in short: "16 Nov". */
export function shortNight(night: string): string {
  return short.format(new Date(`${night}T12:00:00Z`))
}
