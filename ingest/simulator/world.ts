import { dayOf, LocalTime, minuteOf, weekdayOf } from './local-time'
import { pressureAtKPa } from './people/generation'
import type { CorridorPlan, RoomPlan, Scenario, WeeklyHours } from './scenario'
import { type Story, type StorySwitches, storyFor } from './story'

/** Weeks of history that stand before the first start. */
export const HISTORY_WEEKS = 8
export const HISTORY_S = HISTORY_WEEKS * 7 * 86400

/** One demo building in the making: the plan, the seed, the stories dated, and its zones numbered (rooms, then landings). */
export type World = {
  scenario: Scenario
  seed: number
  firstStartS: number
  historyStartS: number
  local: LocalTime
  story: Story
  zones: readonly (RoomPlan | CorridorPlan)[]
  zoneIndex: ReadonlyMap<string, number>
  corridorOfFloor: ReadonlyMap<string, number>
  pressureKPa: number
  isClosed: (day: number) => boolean
}

export type WorldOptions = { seed: number; firstStartS: number; stories?: StorySwitches; historyS?: number }

/** Indoor air temperature for generation rates, K: 21 °C all year. */
export const INDOOR_K = 294.15

/** Makes the world of a scenario; the first start is rounded down to its minute. */
export function makeWorld(scenario: Scenario, options: WorldOptions): World {
  const local = new LocalTime(scenario.building.timeZone)
  const firstStartS = Math.floor(options.firstStartS / 60) * 60
  const zones = [...scenario.rooms, ...scenario.corridors]
  const zoneIndex = new Map(zones.map((zone, i) => [zone.number, i]))
  const closures = scenario
    .closures(local.at(firstStartS).day)
    .map((closure) => [dayOf(closure.fromDate), dayOf(closure.toDate)] as const)
  return {
    scenario,
    seed: options.seed,
    firstStartS,
    historyStartS: firstStartS - (options.historyS ?? HISTORY_S),
    local,
    story: storyFor(firstStartS, local, options.stories),
    zones,
    zoneIndex,
    corridorOfFloor: new Map(scenario.corridors.map((c) => [c.floor, zoneIndex.get(c.number)!])),
    pressureKPa: pressureAtKPa(scenario.building.altitudeM),
    isClosed: (day) => closures.some(([from, to]) => day >= from && day <= to),
  }
}

/** Do weekly hours cover a local day's minute? */
export function coversMinute(hours: readonly WeeklyHours[], day: number, minute: number): boolean {
  const weekday = weekdayOf(day)
  return hours.some((h) => h.days.includes(weekday) && minute >= minuteOf(h.from) && minute < minuteOf(h.to))
}
