/** Local clock of a zone, from the runtime's own zone data: independent of the date library the product uses. */
const formatters = new Map<string, Intl.DateTimeFormat>()

function formatterOf(zone: string): Intl.DateTimeFormat {
  let formatter = formatters.get(zone)
  if (!formatter) {
    formatter = new Intl.DateTimeFormat('en-GB', {
      timeZone: zone,
      hourCycle: 'h23',
      year: 'numeric',
      month: '2-digit',
      day: '2-digit',
      hour: '2-digit',
      minute: '2-digit',
      second: '2-digit',
    })
    formatters.set(zone, formatter)
  }
  return formatter
}

/** The zone's offset from UTC at an instant, seconds. */
export function offsetS(zone: string, tS: number): number {
  const part: Record<string, number> = {}
  const wholeS = Math.floor(tS)
  for (const p of formatterOf(zone).formatToParts(wholeS * 1000)) part[p.type] = Number(p.value)
  const asUtc = Date.UTC(part.year!, part.month! - 1, part.day!, part.hour!, part.minute!, part.second!)
  return asUtc / 1000 - wholeS
}

/** Building-local date of an instant, YYYY-MM-DD. */
export function localDate(zone: string, tS: number): string {
  return new Date((Math.floor(tS) + offsetS(zone, tS)) * 1000).toISOString().slice(0, 10)
}

/** ISO weekday (1 = Monday) of a date. */
export function weekday(date: string): number {
  return ((new Date(`${date}T00:00:00Z`).getUTCDay() + 6) % 7) + 1
}

/** The date `days` after another. */
export function addDays(date: string, days: number): string {
  return new Date(Date.parse(`${date}T00:00:00Z`) + days * 86_400_000).toISOString().slice(0, 10)
}

/** Instant of a local wall time; hours may exceed 24 (next day). A time that does not exist moves forward. */
export function localTimeS(zone: string, date: string, hours: number): number {
  const wallS = Date.parse(`${date}T00:00:00Z`) / 1000 + hours * 3600
  let tS = wallS - offsetS(zone, wallS)
  for (let i = 0; i < 2; i++) tS = wallS - offsetS(zone, tS)
  return tS
}

/** ISO 8601 with Z, whole seconds. */
export const isoZ = (tS: number) => new Date(Math.round(tS) * 1000).toISOString().replace('.000Z', 'Z')
