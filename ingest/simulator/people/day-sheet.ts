import { co2GenerationLps } from './generation'
import type { Person } from './person'

const MINUTES = 1440

/**
 * Who breathes where on one local day: for each zone and local minute the CO2 source in L/s, the number of people, and whether
 * any of them is a cleaner. Local minutes: on a day of 25 hours an hour is lived twice, on one of 23 hours one is left out.
 */
export class DaySheet {
  readonly sourceLps: Float64Array
  readonly persons: Uint16Array
  readonly cleaners: Uint8Array
  constructor(
    readonly zones: number,
    readonly temperatureK: number,
    readonly pressureKPa: number,
  ) {
    this.sourceLps = new Float64Array(zones * MINUTES)
    this.persons = new Uint16Array(zones * MINUTES)
    this.cleaners = new Uint8Array(zones * MINUTES)
  }

  /** Puts a person into a zone from one local minute up to another, at a metabolic rate (multiple of the basal rate). */
  place(
    person: Person,
    zone: number,
    from: number,
    to: number,
    metabolicRate: number,
    cleaning = false,
  ): void {
    if (zone < 0) return
    const start = Math.max(0, Math.round(from))
    const end = Math.min(MINUTES, Math.round(to))
    const rate = metabolicRate * person.vigour
    const lps = co2GenerationLps(person.body, rate, this.temperatureK, this.pressureKPa)
    for (let i = zone * MINUTES + start; i < zone * MINUTES + end; i++) {
      this.sourceLps[i]! += lps
      this.persons[i]! += 1
      if (cleaning) this.cleaners[i] = 1
    }
  }
}

export const ELSEWHERE = -1

/** One member of staff through one day: a zone for each local minute, later plans written over earlier ones. */
export class Whereabouts {
  readonly zone = new Int16Array(MINUTES).fill(ELSEWHERE)
  constructor(
    readonly person: Person,
    readonly home: number,
    readonly homeRate: number,
  ) {}

  go(zone: number, from: number, to: number): void {
    this.zone.fill(zone, Math.max(0, Math.round(from)), Math.max(0, Math.min(MINUTES, Math.round(to))))
  }

  /** At their own desk for the whole of a span? */
  isHome(from: number, to: number): boolean {
    for (let m = from; m < to; m++) if (this.zone[m] !== this.home) return false
    return true
  }

  /** Writes the day into the sheet, one entry for each stay. */
  writeTo(sheet: DaySheet, rateAt: (zone: number) => number): void {
    let start = 0
    for (let m = 1; m <= MINUTES; m++) {
      const zone = this.zone[start]!
      if (m < MINUTES && this.zone[m] === zone) continue
      if (zone !== ELSEWHERE) {
        sheet.place(this.person, zone, start, m, zone === this.home ? this.homeRate : rateAt(zone))
      }
      start = m
    }
  }
}
