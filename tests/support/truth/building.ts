import { integrate, outdoorAir, STEP_S, type ZonePlan } from './air'
import { addDays, localTimeS, weekday } from './calendar'
import { CLASSES, type ClassOfRooms } from './classes'
import type { Draft } from './draft'
import { OFFICE } from './office'
import { type Random, randomFrom } from './random'
import { type EmptySpell, emptySpells, keepMinutes, type Truth } from './record'
import { damage, observe, type Reading, SOUND_SENSOR } from './sensor'

export type TruthRoom = {
  id: string
  className: string
  draft: Draft
  /** the room's entry in rooms.json */
  entry: Record<string, unknown>
  truth: Truth
  spells: EmptySpell[]
  readings: Reading[]
}

export type TruthBuilding = {
  className: string
  zone: string
  dates: string[]
  rooms: TruthRoom[]
  /** rooms that are only there to be a neighbour: not judged */
  neighbours: { entry: Record<string, unknown>; readings: Reading[]; id: string }[]
  outdoor: Reading[] | null
}

export type Order = {
  /** a class, or a name for the building when `mix` names the classes that its rooms take in turn */
  className: string
  mix?: readonly string[]
  seed: number
  part: number
  rooms: number
  days: number
  outdoor: boolean
}

/** Every class that can be ordered: those of the table, and the office of hand-made evenings. */
const KINDS: Record<string, ClassOfRooms> = { ...CLASSES, office: OFFICE }

function kindNamed(name: string): ClassOfRooms {
  const kind = KINDS[name]
  if (!kind) throw new Error(`no class "${name}"; there are ${Object.keys(KINDS).join(', ')}`)
  return kind
}

function firstDate(order: Order, kind: ClassOfRooms, random: Random): string {
  if (kind.startDates) return kind.startDates[order.part % kind.startDates.length]!
  // any week of the year that is far from a clock change
  const monday = addDays('2026-01-05', 7 * random.pick([0, 1, 4, 6, 8, 15, 18, 20, 24, 30, 35, 38, 45, 47]))
  return addDays(monday, ((kind.startWeekday ?? 1) - weekday(monday) + 7) % 7)
}

function zonePlans(draft: Draft): ZonePlan[] {
  const room: ZonePlan = {
    volumeM3: draft.volumeM3,
    stays: draft.stays,
    outdoorRate: draft.outdoorRate,
    wander: draft.wander,
    ...(draft.demand ? { demand: draft.demand } : {}),
  }
  if (!draft.neighbour) return [room]
  return [{ ...room, exchange: { zone: 1, rate: draft.neighbour.rate } }, draft.neighbour.plan]
}

function makeRoom(order: Order, id: string, index: number, frame: Frame) {
  const random = randomFrom(`${order.seed}/${order.className}/${order.part}/${id}`)
  const setting = { random, zone: frame.zone, dates: frame.dates, fromS: frame.fromS, index }
  const className = order.mix ? order.mix[index % order.mix.length]! : order.className
  const draft = kindNamed(className).draft(setting)
  const records = integrate(zonePlans(draft), frame.fromS, frame.outdoor, random.fork('air'))
  const truth = keepMinutes(records[0]!, frame.outdoor)
  const steps = draft.outdoorRate.map((k) => k.fromS)
  const seen = observe(records[0]!.co2Ppm, frame.fromS, draft.sensor, random.fork('sensor'))
  const readings = damage(seen, draft.flaws, random.fork('damage'))
  const volume = draft.volumeM3 * random.uniform(0.97, 1.03)
  const entry: Record<string, unknown> = { id, volume_m3: Number(volume.toFixed(1)), ...draft.declared }
  const room: TruthRoom = { id, className, draft, entry, truth, spells: emptySpells(truth, steps), readings }
  if (!draft.neighbour?.measured) return { room, neighbour: null }
  const nextDoor = `${id}-hall`
  entry.neighbour = nextDoor
  const hallSensor = { ...SOUND_SENSOR, offsetPpm: random.uniform(-25, 25), gain: random.uniform(0.97, 1.03) }
  const hall = observe(records[1]!.co2Ppm, frame.fromS, hallSensor, random.fork('hall sensor'))
  const hallEntry = { id: nextDoor, volume_m3: Number(draft.neighbour.plan.volumeM3.toFixed(1)) }
  return { room, neighbour: { id: nextDoor, entry: hallEntry, readings: hall } }
}

type Frame = { zone: string; dates: string[]; fromS: number; outdoor: Float64Array }

/** Draws one building of rooms of a class, or of several in turn: everything depends on the order alone. */
export function makeBuilding(order: Order): TruthBuilding {
  const kind = kindNamed(order.mix?.[0] ?? order.className)
  const random = randomFrom(`${order.seed}/${order.className}/${order.part}/building`)
  const zone = random.pick(
    kind.zones ?? ['Europe/Lisbon', 'Europe/Berlin', 'Europe/London', 'Europe/Helsinki'],
  )
  const first = firstDate(order, kind, random)
  const dates = Array.from({ length: order.days + 1 }, (_, d) => addDays(first, d))
  const fromS = localTimeS(zone, first, 0)
  // the last date is the morning after the last evening
  const steps = Math.floor((localTimeS(zone, dates[order.days]!, 12) - fromS) / STEP_S)
  const outdoor = outdoorAir(fromS, steps, random.uniform(418, 445), random.fork('outdoor'))
  const frame = { zone, dates, fromS, outdoor }
  const made = Array.from({ length: order.rooms }, (_, r) =>
    makeRoom(order, `r${String(r + 1).padStart(2, '0')}`, r, frame),
  )
  const outdoorSensor = {
    ...SOUND_SENSOR,
    intervalS: 600,
    mixingShare: 0,
    whitePpm: 4,
    offsetPpm: random.uniform(-12, 12),
  }
  return {
    className: order.className,
    zone,
    dates: dates.slice(0, order.days),
    rooms: made.map((m) => m.room),
    neighbours: made.flatMap((m) => (m.neighbour ? [m.neighbour] : [])),
    outdoor: order.outdoor ? observe(outdoor, fromS, outdoorSensor, random.fork('outdoor sensor')) : null,
  }
}
