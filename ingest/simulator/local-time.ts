import { getTimezoneOffset } from 'date-fns-tz'

/** An instant as the building's wall clock shows it. `day` counts local dates since 1970-01-01; weekday 1 is Monday (ISO 8601). */
export type LocalMinute = { day: number; minute: number; weekday: number }

const BLOCK_S = 900

/** Converts between epoch seconds and one building's local days and minutes; IANA zone, daylight saving included. */
export class LocalTime {
  private readonly offsets = new Map<number, number>()
  constructor(readonly zone: string) {
    if (Number.isNaN(getTimezoneOffset(zone, new Date(0)))) throw new RangeError(`unknown time zone ${zone}`)
  }

  /** Seconds east of UTC at an instant; zones change on quarter hours only, so one look-up serves 15 minutes. */
  offsetS(timeS: number): number {
    const block = Math.floor(timeS / BLOCK_S)
    let offset = this.offsets.get(block)
    if (offset === undefined) {
      offset = getTimezoneOffset(this.zone, new Date(block * BLOCK_S * 1000)) / 1000
      if (this.offsets.size > 4096) this.offsets.clear()
      this.offsets.set(block, offset)
    }
    return offset
  }

  at(timeS: number): LocalMinute {
    const local = timeS + this.offsetS(timeS)
    const day = Math.floor(local / 86400)
    return { day, minute: Math.floor((local - day * 86400) / 60), weekday: weekdayOf(day) }
  }

  /** Epoch seconds of a local day and minute; where daylight saving repeats a minute, one of its two instants. */
  instant(day: number, minute: number): number {
    const local = day * 86400 + minute * 60
    const guess = local - this.offsetS(local)
    return local - this.offsetS(guess)
  }
}

/** ISO weekday (1 Monday … 7 Sunday) of a day count; 1970-01-01 was a Thursday. */
export function weekdayOf(day: number): number {
  return ((((day + 3) % 7) + 7) % 7) + 1
}

/** YYYY-MM-DD of a day count. */
export function dateOf(day: number): string {
  return new Date(day * 86400000).toISOString().slice(0, 10)
}

/** Day count of YYYY-MM-DD. */
export function dayOf(date: string): number {
  const ms = Date.parse(`${date}T00:00:00Z`)
  if (Number.isNaN(ms)) throw new RangeError(`not a date: ${date}`)
  return Math.round(ms / 86400000)
}

/** Minutes after midnight of "HH:MM" ("24:00" is the day's end). */
export function minuteOf(clock: string): number {
  const [h, m] = clock.split(':').map(Number)
  if (h === undefined || m === undefined || Number.isNaN(h + m)) throw new RangeError(`not a time: ${clock}`)
  return h * 60 + m
}
