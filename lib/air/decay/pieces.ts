/** What each piece of a segmented fall is: an empty room at one rate, people still or again inside, or the floor. */
import type { Segmented } from './segments'

export type Role = 'empty' | 'people' | 'floor' | 'settling'
export type Piece = {
  fromH: number
  toH: number
  ratePerHour: number
  sdPerHour: number
  startExcessPpm: number
  endExcessPpm: number
  role: Role
  /** slower than what follows, yet long enough to be a decay of its own: somebody inside, or a supply that rose later */
  slowFirst?: boolean
}

/** The pieces of a fit with the standard deviation of each rate, correlated residuals counted. */
export function piecesOf(segmented: Segmented, endH: number): Piece[] {
  const { fit, scale } = segmented
  const size = fit.ratesPerHour.length + 3
  const edges = [fit.fromH, ...fit.breaksH, endH]
  const pieces: Piece[] = []
  let logExcess = fit.logStartExcess
  fit.ratesPerHour.forEach((ratePerHour, k) => {
    const start = Math.exp(logExcess)
    logExcess -= ratePerHour * (edges[k + 1]! - edges[k]!)
    const own = fit.covariance[(k + 1) * size + k + 1]!
    pieces.push({
      fromH: edges[k]!,
      toH: edges[k + 1]!,
      ratePerHour,
      sdPerHour: Math.sqrt(own * scale.variance),
      startExcessPpm: start,
      endExcessPpm: Math.exp(logExcess),
      role: 'empty',
    })
  })
  return pieces
}

const hours = (piece: Piece) => piece.toH - piece.fromH
const slower = (a: Piece, b: Piece) =>
  a.ratePerHour < 0.85 * b.ratePerHour &&
  a.ratePerHour < b.ratePerHour - 2 * Math.hypot(a.sdPerHour, b.sdPerHour)

/** A slow piece that may be a stopped fan at night rather than people: long, and surely still falling. */
function longAndFalling(piece: Piece): boolean {
  return hours(piece) >= 3 && piece.ratePerHour - 2 * piece.sdPerHour > 0.015
}

/** Long and steep enough for its own shape to tell whether the room was empty. */
function longEnough(piece: Piece): boolean {
  return hours(piece) >= 0.75 && piece.ratePerHour * hours(piece) >= 0.55
}

/** Gives every piece its role. `floorPpm` is the excess below which a piece says nothing of a rate. */
export function assignRoles(pieces: Piece[], floorPpm: number): Piece[] {
  const result = pieces.map((piece) => ({ ...piece }))
  for (const piece of result) {
    if (piece.startExcessPpm < floorPpm) piece.role = 'floor'
    else if (piece.ratePerHour + 2 * piece.sdPerHour < 0.02) piece.role = 'people'
  }
  markLeading(result)
  markBumps(result, floorPpm)
  return result
}

function markLeading(pieces: Piece[]): void {
  for (let k = 0; k + 1 < pieces.length; k++) {
    const own = pieces[k]!
    const next = pieces[k + 1]!
    if (next.role === 'floor') break
    if (own.role === 'people') continue
    if (slower(own, next) && !longAndFalling(own)) {
      if (longEnough(own)) own.slowFirst = true
      else own.role = 'people'
    } else if (hours(own) < 0.15 && own.ratePerHour * hours(own) < 0.35 && slower(next, own))
      own.role = 'settling'
    else break
  }
}

/** Slower pieces between two faster ones are visits, unless they last for hours of a night. */
function markBumps(pieces: Piece[], floorPpm: number): void {
  for (let k = 0; k < pieces.length; k++) {
    const before = pieces[k]!
    if (before.role !== 'empty') continue
    for (let later = k + 2; later < pieces.length; later++) {
      const after = pieces[later]!
      if (after.startExcessPpm < floorPpm || after.ratePerHour < 0.6 * before.ratePerHour) continue
      for (let j = k + 1; j < later; j++) {
        const between = pieces[j]!
        if (slower(between, before) && slower(between, after) && !longAndFalling(between))
          between.role = 'people'
      }
    }
  }
}

/** Runs of neighbouring empty pieces: each is one window, a change of rate inside it. A slow first piece stands alone, to be judged by itself. */
export function emptyRuns(pieces: readonly Piece[]): { from: number; to: number }[] {
  const runs: { from: number; to: number }[] = []
  pieces.forEach((piece, k) => {
    if (piece.role !== 'empty') return
    const last = runs[runs.length - 1]
    if (last && last.to === k - 1 && !pieces[k - 1]!.slowFirst) last.to = k
    else runs.push({ from: k, to: k })
  })
  return runs
}
