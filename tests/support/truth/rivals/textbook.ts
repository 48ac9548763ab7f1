import type { Answer } from '../answer'
import type { TruthBuilding } from '../building'
import { isoZ, localTimeS } from '../calendar'
import type { Reading } from '../sensor'
import { runningMedian, studentQuantile975 } from './statistics'

/** The largest fall within two hours that counts as a drop, ppm. */
const DROP_PPM = 150
const LOOK_AHEAD_S = 7200
/** how far before it the peak is looked for */
const LOOK_BACK_S = 1800
const LONGEST_S = 4 * 3600

/** Where the last drop of the day starts: the latest reading from which the level falls by 150 ppm within two hours. */
function lastDrop(rows: readonly Reading[], smooth: readonly number[], untilS: number): number {
  for (let i = rows.length - 2; i >= 0; i--) {
    if (rows[i]!.clockS > untilS) continue
    let lowest = Infinity
    for (let k = i + 1; k < rows.length && rows[k]!.clockS - rows[i]!.clockS <= LOOK_AHEAD_S; k++)
      lowest = Math.min(lowest, smooth[k]!)
    if (smooth[i]! - lowest >= DROP_PPM) {
      let top = i
      for (let k = i; k >= 0 && rows[i]!.clockS - rows[k]!.clockS <= LOOK_BACK_S; k--)
        if (smooth[k]! > smooth[top]!) top = k
      return top
    }
  }
  return -1
}

/** Straight line through ln(C − B): slope, its ordinary standard error, and R². */
export function logLine(rows: readonly Reading[], background: number) {
  const t0 = rows[0]!.clockS
  let n = 0
  let st = 0
  let sy = 0
  let stt = 0
  let sty = 0
  let syy = 0
  for (const row of rows) {
    if (row.ppm <= background) continue
    const t = (row.clockS - t0) / 3600
    const y = Math.log(row.ppm - background)
    n++
    st += t
    sy += y
    stt += t * t
    sty += t * y
    syy += y * y
  }
  const sxx = stt - (st * st) / n
  const slope = (sty - (st * sy) / n) / sxx
  const total = syy - (sy * sy) / n
  const left = Math.max(0, total - slope * slope * sxx)
  return { n, slope, standardError: Math.sqrt(left / (n - 2) / sxx), r2: total > 0 ? 1 - left / total : 0 }
}

function oneNight(
  building: TruthBuilding,
  roomId: string,
  all: readonly Reading[],
  date: string,
): Answer | null {
  const fromS = localTimeS(building.zone, date, 12)
  const toS = localTimeS(building.zone, date, 31)
  const rows = all.filter((r) => r.clockS >= fromS && r.clockS < toS)
  if (rows.length < 10) return null
  const smooth = runningMedian(
    rows.map((r) => r.ppm),
    2,
  )
  const start = lastDrop(rows, smooth, localTimeS(building.zone, date, 26))
  if (start < 0) return null
  const nightMinimum = Math.min(...smooth)
  const background = nightMinimum < 520 ? nightMinimum : 420
  const window: Reading[] = []
  for (let i = start; i < rows.length; i++) {
    const excess = smooth[i]! - background
    if (
      rows[i]!.clockS - rows[start]!.clockS > LONGEST_S ||
      excess < Math.max(50, (smooth[start]! - background) * 0.2)
    )
      break
    window.push(rows[i]!)
  }
  if (window.length < 8) return null
  const line = logLine(window, background)
  const rate = -line.slope
  if (line.n < 8 || line.r2 < 0.85 || !(rate > 0)) return null
  const half = studentQuantile975(line.n - 2) * line.standardError
  return {
    room: roomId,
    night: date,
    start: isoZ(window[0]!.clockS),
    end: isoZ(window.at(-1)!.clockS),
    kind: 'fit',
    ach: rate,
    ach_low: rate - half,
    ach_high: rate + half,
    background_ppm: background,
    quality: 'accepted',
    reasons: [],
  }
}

/**
 * What a textbook prescribes: log-linear least squares after the day's last drop, the night's minimum (or 420 ppm) as background,
 * down to a fifth of the start, R² of at least 0.85, and the ordinary 95 % interval of the slope.
 */
export function textbook(building: TruthBuilding): Answer[] {
  return building.rooms.flatMap((room) => {
    const rows = [...room.readings].sort((a, b) => a.clockS - b.clockS)
    return building.dates.flatMap((date) => oneNight(building, room.id, rows, date) ?? [])
  })
}
