import type { ReviewToRefit } from '@/db/changes/nights'
import type { BuildingPlan } from '@/db/queries/building-plan'
import { refitDecay } from '@/lib/air/decay/refit'
import type { Series } from '@/lib/air/types'
import { withOffsets } from './offsets'
import { sensorSpecOf } from './rooms'

export type Refitted = { reviewId: number; rates: { rate: number; low: number; high: number } | null }

/** Fits reviewers' own windows again after late readings: the same fit as under the hand. Null where the window gives no figure any more. */
export function refitReviews(
  plan: BuildingPlan,
  records: ReadonlyMap<number, Series>,
  reviews: readonly ReviewToRefit[],
): Refitted[] {
  return reviews.flatMap(({ reviewId, sensorId, fromS, toS, background }) => {
    const record = records.get(sensorId)
    if (!record) return []
    const sensor = plan.sensors.find((one) => one.id === sensorId)
    const offsets = plan.offsets.filter((offset) => offset.sensorId === sensorId)
    const fit = refitDecay({
      series: withOffsets(record, offsets),
      ...{ fromS, toS, background },
      ...(sensor ? { sensor: sensorSpecOf(sensor) } : {}),
    })
    const { ratePerHour: rate, lowPerHour: low, highPerHour: high } = fit
    return [{ reviewId, rates: rate === null || low === null || high === null ? null : { rate, low, high } }]
  })
}
