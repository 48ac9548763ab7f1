/** A decay held against the room's others: whoever is inside only ever makes CO2 fall slower, so a faster decay in the same mode speaks against a slow one. */
import { PEOPLE, REFERENCE } from '@/lib/air/constants'
import type { EstimateKind, Mode } from '@/lib/air/types'
import { quantile } from '@/lib/math/robust'
import { peopleProbability } from './people'
import type { Reading } from './run'
import type { Weighed } from './weigh'

/** A weighed reading with its mode and whether it tells a rate or only a bound. */
export type Placed = { weighed: Weighed; mode: Mode; kind: EstimateKind }

/** Time constants that a window lasts. */
const lengthOf = ({ piece, estimate }: Reading) => estimate.ratePerHour * (piece.toH - piece.fromH)

/** A bound from below holds with people inside too; a rate speaks for the empty room only where nobody seems to have been there. */
function speaks({ weighed, kind }: Placed): boolean {
  if (kind === 'at-least') return true
  return kind !== 'at-most' && peopleProbability(weighed.evidence, weighed.before) < PEOPLE.refused
}

/** A rate that steps down inside one decay is a fan that slowed as likely as people who stayed. */
const sameDecay = (a: Reading, b: Reading) => a.fit === b.fit

/**
 * True when a short decay before the room fills again is slower than another one of that day in the same mode, earlier or later, or than the
 * faster rates of the last days, by more than both intervals allow: somebody stayed. `recent` are sure rates of earlier days, 1/h, in any mode.
 */
export function contradicted(own: Placed, all: readonly Placed[], recent: readonly number[]): boolean {
  const { entry, quiet } = own.weighed
  if (quiet || own.kind === 'at-least' || lengthOf(entry) > REFERENCE.longEnough) return false
  const high = entry.estimate.highPerHour * REFERENCE.margin
  const today = all.some(
    (other) =>
      other !== own &&
      other.mode === own.mode &&
      !sameDecay(other.weighed.entry, entry) &&
      speaks(other) &&
      other.weighed.entry.estimate.lowPerHour > high,
  )
  if (today || own.mode !== 'supply on' || recent.length < REFERENCE.fewest) return today
  return quantile(recent, 0.75) * (1 - REFERENCE.spread) > high
}

/**
 * True when no other decay of the room speaks for this one and it is too short to stand alone: people inside would look the same. Before the room
 * fills again it needs any company at all; in a quiet evening only a very short one does, and then a rate like its own; a slow room's night is long instead.
 */
export function unreferenced(own: Placed, all: readonly Placed[], recent: readonly number[]): boolean {
  const { entry, quiet } = own.weighed
  const { lowPerHour, highPerHour } = entry.estimate
  if (lengthOf(entry) > (quiet ? REFERENCE.quietLength : REFERENCE.aloneLength)) return false
  if (entry.piece.toH - entry.piece.fromH > REFERENCE.aloneHours) return false
  const near = (rate: number) => rate > lowPerHour / REFERENCE.margin && rate < highPerHour * REFERENCE.margin
  if (quiet ? recent.some(near) : recent.length > 0) return false
  return !all.some(
    (other) => other !== own && !sameDecay(other.weighed.entry, entry) && supports(other, entry),
  )
}

/** A decay long enough, with nobody seen in it, at a rate that is not above the other's. */
function supports(other: Placed, entry: Reading): boolean {
  const { evidence, before } = other.weighed
  const long = lengthOf(other.weighed.entry) > REFERENCE.supportingLength
  const sure = long && peopleProbability(evidence, before) < PEOPLE.doubtful && other.kind === 'fit'
  return sure && other.weighed.entry.estimate.lowPerHour < entry.estimate.highPerHour
}

/**
 * True when a decay too short to stand by itself is followed, with no rise between, by people and then a
 * faster fall, or at once by a slower one in the same known mode: whoever held the level up then was most likely inside before.
 */
export function heldUpLater(own: Placed, all: readonly Placed[]): boolean {
  const { entry, room } = own.weighed
  if (own.kind !== 'fit' || lengthOf(entry) > REFERENCE.longEnough) return false
  return all.some((other) => {
    const later = other.weighed.entry
    if (other.weighed.room !== room || later.fromS < entry.toS - 60) return false
    if (!sameDecay(later, entry))
      return (
        later.fromS - entry.toS < REFERENCE.heldWithinS &&
        later.estimate.ratePerHour > REFERENCE.faster * entry.estimate.ratePerHour
      )
    return (
      own.mode === 'supply on' &&
      other.mode === own.mode &&
      later.estimate.highPerHour < entry.estimate.lowPerHour
    )
  })
}
