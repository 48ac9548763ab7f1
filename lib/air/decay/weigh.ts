/** All decays of a room's day weighed together: was the room empty, and does any other decay speak for a lonely one? */
import { GATES, PEOPLE } from '@/lib/air/constants'
import type { SupplyStop } from './modes'
import { peopleProbability, rateEvidence, shapeEvidence, unsupported } from './people'
import type { ReadFall } from './room-record'
import type { Reading } from './run'

export type Weighed = {
  entry: Reading
  room: ReadFall
  evidence: number
  before: number
  lonely: boolean
  quiet: boolean
}

/** Weighs for every reading whether the room was empty; rates that are sure help to judge the others. */
export function weighPeople(
  falls: readonly ReadFall[],
  volumeM3: number,
  recent: readonly number[],
): Weighed[] {
  const weighed: Weighed[] = falls.flatMap((room, k) => {
    const next = falls[k + 1]
    const quiet = !next || next.fall.fromS - room.fall.toS > PEOPLE.quietS
    const before = quiet ? PEOPLE.beforeQuiet : PEOPLE.beforeDay
    return (room.reading?.readings ?? []).map((entry) => {
      const evidence = shapeEvidence(entry, room.reading!.prior, volumeM3, recent)
      return {
        entry,
        room,
        evidence,
        before: entry.piece.slowFirst ? PEOPLE.beforeSlow : before,
        lonely: false,
        quiet,
      }
    })
  })
  shareAlongRuns(weighed)
  const sure = weighed.filter(
    ({ evidence, before }) => peopleProbability(evidence, before) < PEOPLE.doubtful / 2,
  )
  return weighed.map((own) => {
    const others = sure
      .filter((other) => other.entry !== own.entry)
      .map((other) => other.entry.piece.ratePerHour)
    const known = [...others, ...recent]
    const limit = own.entry.changeAtStart ? GATES.lonelyExcessPpm : 1.6 * GATES.lonelyExcessPpm
    const lonely = own.entry.piece.startExcessPpm < limit && unsupported(own.entry, known)
    // people who leave one by one look like a slow decay too: its shape alone never makes it sure
    if (own.entry.piece.slowFirst)
      return { ...own, evidence: Math.min(own.evidence, PEOPLE.mostSlowEvidence), lonely }
    return { ...own, evidence: own.evidence + rateEvidence(own.entry, known), lonely }
  })
}

/** Whoever is inside while the rate falls is still inside afterwards: an empty second window makes the first one empty too. */
function shareAlongRuns(weighed: Weighed[]): void {
  for (let k = weighed.length - 2; k >= 0; k--) {
    const own = weighed[k]!
    const next = weighed[k + 1]!
    if (own.room !== next.room || own.entry.fit !== next.entry.fit || own.entry.piece.slowFirst) continue
    if (next.entry.piece.ratePerHour < own.entry.piece.ratePerHour)
      own.evidence = Math.max(own.evidence, next.evidence)
  }
}

/**
 * True when a window's rate steps down only mildly and no fellow slowed at that instant: a fan that stops leaves a fraction, a supply that follows
 * CO2 eases off, and two steps drawn through that ease speak for no moment of it.
 */
export function mildStep(entry: Reading, all: readonly Reading[], stops: readonly SupplyStop[]): boolean {
  const beside = all.filter((other) => other.fit === entry.fit && Math.abs(other.index - entry.index) === 1)
  return beside.some((other) => {
    const [first, second] = other.index < entry.index ? [other, entry] : [entry, other]
    const atS = first!.toS
    if (stops.some((stop) => Math.abs(stop.atS - atS) < 900)) return false
    const ratio = first!.piece.ratePerHour / second!.piece.ratePerHour
    return ratio > 1 && ratio < GATES.mildStep
  })
}
