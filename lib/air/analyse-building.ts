/**
 * One building, one local day: every decay that starts on it, in every room, with what rooms know of each other. The nightly job, the command
 * `analyse` and the tests all call this; it reads no clock, no file and no database.
 */
import { outdoorLevel } from './decay/background'
import { cleanRecord } from './decay/clean'
import { findFalls, levelTrack } from './decay/falls'
import type { QuietFloor } from './decay/floor'
import { boundKind } from './decay/judge'
import {
  type EarlierStop,
  habitualStop,
  modeOf,
  type RateDrop,
  type SupplyStop,
  sharedStops,
} from './decay/modes'
import { decayOf, refusedDecay } from './decay/outcome'
import { peopleProbability } from './decay/people'
import { contradicted, heldUpLater, unreferenced } from './decay/reference'
import {
  type DayWindow,
  nightsFloor,
  openRecord,
  type ReadFall,
  type RoomRecord,
  readFalls,
} from './decay/room-record'
import { mildStep, type Weighed, weighPeople } from './decay/weigh'
import type { Background, Decay, RoomSpec, Series, SupplyChange } from './types'

/** What earlier nights left behind for a room. */
export type RoomHistory = {
  quietFloors: readonly QuietFloor[]
  /** sure rates of this room from the last nights, 1/h */
  recentRates?: readonly number[]
  /** decays of the last nights that showed demand control, see demandControlledCount */
  demandControlled?: number
  /** earlier nights on which this room's air handler was seen to stop, seconds after local midnight */
  supplyStops?: readonly EarlierStop[]
}

export type BuildingRoom = {
  room: RoomSpec
  sensorId?: string
  /** covers local day start - 2 h to next day 12:00 */
  series: Series
  supply?: readonly SupplyChange[]
  history?: RoomHistory
}

export type BuildingDay = {
  timeZone: string
  /** local date, YYYY-MM-DD */
  date: string
  dayStartS: number
  dayEndS: number
  rooms: readonly BuildingRoom[]
  outdoor?: Series
  defaultOutdoor?: { ppm: number; standardUncertaintyPpm: number }
}

export type RoomNote = {
  code: 'supply-stopped-early' | 'floor-implausible' | 'sensor-stuck' | 'clock-moved'
  text: string
  atS?: number
}

export type RoomDay = {
  roomId: string
  sensorId?: string
  decays: Decay[]
  background: Background | null
  quietFloor: QuietFloor | null
  supplyStops: SupplyStop[]
  notes: RoomNote[]
}

type Prepared = { input: BuildingRoom; opened: RoomRecord; falls: ReadFall[] }

/** The floor that one night leaves in history. */
export function nightFloor(input: Pick<BuildingRoom, 'room' | 'series'>, day: DayWindow): QuietFloor | null {
  const record = cleanRecord(input.series, input.room.sensor)
  const track = levelTrack(record, day.dayStartS + 43_200, day.dayEndS + 43_200)
  return nightsFloor(track, findFalls(track), day)
}

function prepareAll(day: BuildingDay): Prepared[] {
  const outdoorRecord = day.outdoor && day.outdoor.timeS.length > 3 ? cleanRecord(day.outdoor) : null
  const outdoor = outdoorRecord
    ? outdoorLevel(levelTrack(outdoorRecord, day.dayStartS - 7200, day.dayEndS + 43_200))
    : undefined
  const opened = day.rooms.map(({ room, series, history }) =>
    openRecord(room, series, day, history?.quietFloors),
  )
  const byId = new Map(day.rooms.map(({ room }, i) => [room.id, opened[i]!]))
  return day.rooms.map((input, i) => {
    const neighbour = input.room.neighbour === undefined ? undefined : byId.get(input.room.neighbour)
    const around = { outdoor, defaultOutdoor: day.defaultOutdoor, neighbour }
    return { input, opened: opened[i]!, falls: readFalls(opened[i]!, day, around) }
  })
}

/** The rates of a finished day that later nights may lean on: accepted, and long enough to be sure. */
export function sureRates(day: RoomDay): number[] {
  return day.decays.flatMap((decay) => {
    const rate = decay.airChangeRatePerHour
    const long = rate !== null && rate * (decay.endS - decay.startS) > 1.2 * 3600
    return decay.quality === 'accepted' && long ? [rate] : []
  })
}

/** How many decays of a finished day showed demand control, for later nights to know the room by. */
export function demandControlledCount(day: RoomDay): number {
  return day.decays.filter((decay) => decay.kind === 'range' && decay.quality !== 'refused').length
}

/** Rate drops of every room of one air handler, to be compared. */
function dropsOf(prepared: readonly Prepared[]): RateDrop[] {
  const drops: RateDrop[] = []
  for (const { input, falls } of prepared) {
    for (const { reading } of falls) {
      reading?.readings.forEach((own, k) => {
        const next = reading.readings[k + 1]
        if (!own.changeAtEnd || !next || next.estimate.ratePerHour > 0.8 * own.estimate.ratePerHour) return
        drops.push({
          roomId: input.room.id,
          ...own.changeAtEnd,
          before: own.estimate.ratePerHour,
          after: next.estimate.ratePerHour,
        })
      })
    }
  }
  return drops
}

/** Analyses every room of a building for one local date. Never throws for bad readings: those lead to refused decays with reasons. */
export function analyseBuildingDay(day: BuildingDay): RoomDay[] {
  const prepared = prepareAll(day)
  const stops = new Map<string, SupplyStop[]>()
  const habits = new Map<string, SupplyStop>()
  for (const handler of new Set(
    day.rooms.map(({ room }) => room.airHandler).filter((name) => name !== undefined),
  )) {
    const served = prepared.filter(({ input }) => input.room.airHandler === handler)
    stops.set(handler, sharedStops(dropsOf(served)))
    const habit = habitualStop(served[0]?.input.history?.supplyStops ?? [], day.dayStartS)
    if (habit) habits.set(handler, habit)
  }
  return prepared.map((room) => {
    const handler = room.input.room.airHandler ?? ''
    return finish(day, room, stops.get(handler) ?? [], habits.get(handler))
  })
}

/** Nearly every decay of a demand-controlled room bends; now and then one does anywhere. */
function isDemandRoom(weighed: readonly Weighed[], history: RoomHistory | undefined): boolean {
  const today = weighed.filter(({ entry }) => entry.demand).length
  return (
    today >= 2 || today + (history?.demandControlled ?? 0) > Math.max(1, history?.recentRates?.length ?? 0)
  )
}

function finish(day: BuildingDay, prepared: Prepared, seen: SupplyStop[], habit?: SupplyStop): RoomDay {
  // rooms that slow together today say more than a habit
  const stops = seen.length > 0 || !habit ? seen : [habit]
  const { input, opened, falls } = prepared
  const notes: RoomNote[] = []
  const decays: Decay[] = []
  let used: Background | null = null
  const recent = input.history?.recentRates ?? []
  const weighed = weighPeople(falls, input.room.volumeM3, recent)
  const placed = weighed.map((own) => {
    const moded = modeOf(input.room, own.entry, { supply: input.supply, stops, timeZone: day.timeZone })
    return { weighed: own, moded, mode: moded.mode, kind: boundKind(own.entry, own.room.record) }
  })
  const demandRoom = isDemandRoom(weighed, input.history)
  for (const { reading, background, fall, record } of falls) {
    used ??= background
    const own = reading?.readings ?? []
    if (own.length === 0)
      decays.push(refusedDecay({ day, room: input.room, fall, reading, background, record }))
    for (const place of placed.filter((p) => own.includes(p.weighed.entry))) {
      const { entry, evidence, before, lonely } = place.weighed
      if (place.moded.disagrees) noteEarlyStop(notes, stops)
      decays.push(
        decayOf({
          day,
          room: input.room,
          entry,
          reading: reading!,
          background,
          record,
          mode: place.moded,
          people: peopleProbability(evidence, before),
          demandRoom,
          stops,
          lonely,
          mild: mildStep(entry, own, stops),
          floorsAgree: opened.floorsAgree,
          contradicted: contradicted(place, placed, recent),
          unreferenced: unreferenced(place, placed, recent) || heldUpLater(place, placed),
        }),
      )
    }
  }
  for (const cut of opened.record.stuck) {
    notes.push({ code: 'sensor-stuck', text: 'The sensor repeated one value for too long.', atS: cut.fromS })
  }
  const inDay = decays.filter((decay) => decay.startS >= day.dayStartS && decay.startS < day.dayEndS)
  inDay.sort((a, b) => a.startS - b.startS)
  return {
    roomId: input.room.id,
    sensorId: input.sensorId,
    decays: inDay,
    background: used,
    quietFloor: nightsFloor(opened.track, opened.falls, day),
    supplyStops: seen,
    notes,
  }
}

function noteEarlyStop(notes: RoomNote[], stops: readonly SupplyStop[]): void {
  if (notes.some((note) => note.code === 'supply-stopped-early')) return
  notes.push({
    code: 'supply-stopped-early',
    text: 'The supply stopped earlier than its hours say: several rooms of this air handler slowed together.',
    atS: stops[0]?.atS,
  })
}
