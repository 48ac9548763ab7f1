import type { Series } from '@/lib/air/types'

/** What a fresh-air check found: ppm added to the reading from an instant on, until the next check. */
export type Offset = { fromAt: Date; offsetPpm: number }

/** The record with each reading's latest offset added, ppm; the given record is not touched. `offsets` in order of time. */
export function withOffsets(series: Series, offsets: readonly Offset[]): Series {
  const last = series.timeS.at(-1)
  if (last === undefined || !offsets.some((offset) => offset.fromAt.getTime() / 1000 <= last)) return series
  const co2Ppm = series.co2Ppm.slice()
  let next = 0
  let offsetPpm = 0
  series.timeS.forEach((timeS, i) => {
    while (next < offsets.length && offsets[next]!.fromAt.getTime() / 1000 <= timeS)
      offsetPpm = offsets[next++]!.offsetPpm
    co2Ppm[i]! += offsetPpm
  })
  return { timeS: series.timeS, co2Ppm }
}
