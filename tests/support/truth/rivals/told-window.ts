import type { Answer } from '../answer'
import type { TruthBuilding, TruthRoom } from '../building'
import { isoZ, localDate } from '../calendar'
import { type Evening, eveningsOf } from '../judge'
import type { Reading } from '../sensor'
import { quantile } from '../summary'
import { type Fit, fitDecay, fitWithNeighbour } from './least-squares'
import { studentQuantile975 } from './statistics'

/** Level and standard uncertainty of the background: the settled room, else the outdoor sensor, else 425 ppm. */
function backgroundOf(
  building: TruthBuilding,
  room: TruthRoom,
  evening: Evening,
): { ppm: number; sd: number } {
  const { spell } = evening
  const settledS = spell.fromS + (4.5 / spell.totalPerHour) * 3600
  const own = room.readings.filter((r) => r.trueS > settledS && r.trueS < spell.steadyToS).map((r) => r.ppm)
  if (own.length >= 5) return { ppm: quantile(own, 0.5), sd: 8 }
  const outdoor = building.outdoor?.filter((r) => r.trueS > spell.fromS - 3600 && r.trueS < spell.toS)
  if (outdoor && outdoor.length > 0)
    return { ppm: outdoor.reduce((a, b) => a + b.ppm, 0) / outdoor.length, sd: 18 }
  return { ppm: 425, sd: 22 }
}

/** The hall's level at each of the room's readings (linear between its own readings). */
function nextDoor(building: TruthBuilding, room: TruthRoom, rows: readonly Reading[]): number[] {
  const hall = building.neighbours.find((n) => n.id === room.entry.neighbour)!.readings
  let k = 0
  return rows.map((row) => {
    while (k + 2 < hall.length && hall[k + 1]!.trueS < row.trueS) k++
    const a = hall[k]!
    const b = hall[k + 1]!
    return a.ppm + ((row.trueS - a.trueS) / (b.trueS - a.trueS)) * (b.ppm - a.ppm)
  })
}

function oneEvening(building: TruthBuilding, evening: Evening): Answer | null {
  const { room, spell } = evening
  const fromS = spell.fromS + Math.max(240, 4 * room.draft.sensor.lagS)
  const toS = Math.min(spell.steadyToS, fromS + (2.5 / spell.totalPerHour) * 3600)
  const rows = room.readings.filter(
    (r) => r.trueS >= fromS && r.trueS < toS && r.ppm < room.draft.sensor.rangeMaxPpm,
  )
  if (rows.length < 6) return null
  const background = backgroundOf(building, room, evening)
  const coupled = room.draft.neighbour !== undefined
  let found: Fit | null
  if (coupled) found = fitWithNeighbour(rows, background.ppm, nextDoor(building, room, rows))
  else found = fitDecay(rows, background.ppm, background.sd)
  if (!found) return null
  const half = studentQuantile975(found.degrees) * found.standardErrorOfLn
  return {
    room: room.id,
    night: localDate(building.zone, rows[0]!.clockS),
    start: isoZ(rows[0]!.clockS),
    end: isoZ(rows.at(-1)!.clockS),
    kind: 'fit',
    ach: found.rate,
    ach_low: found.rate * Math.exp(-half),
    ach_high: found.rate * Math.exp(half),
    background_ppm: background.ppm,
    quality: 'accepted',
    reasons: coupled ? ['neighbour-coupled'] : [],
  }
}

/**
 * The fit that is told the truth about the window: when the last person left, when the rate changed or somebody came, and how long
 * two and a half time constants are. What remains is the sensor and the background. Answers each evening that has a real decay;
 * says nothing where an unmeasured neighbour makes the rate unknowable.
 */
export function toldWindow(building: TruthBuilding): Answer[] {
  return building.rooms.flatMap((room) => {
    if (room.draft.neighbour && !room.draft.neighbour.measured) return []
    return eveningsOf(building, room).flatMap((e) => (e.answerable ? (oneEvening(building, e) ?? []) : []))
  })
}
