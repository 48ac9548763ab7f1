import type { RoomEstimate } from '@/lib/air/weeks'

/** An accepted supply-on fit; fields can be replaced. */
export function estimate(night: string, ratePerHour: number, over: Partial<RoomEstimate> = {}): RoomEstimate {
  return {
    night,
    kind: 'fit',
    airChangeRatePerHour: ratePerHour,
    airChangeRateLowPerHour: ratePerHour * 0.95,
    airChangeRateHighPerHour: ratePerHour * 1.05,
    outdoorRateLowPerHour: null,
    outdoorRateHighPerHour: null,
    mode: 'supply on',
    modeFrom: 'schedule',
    quality: 'accepted',
    reasons: [],
    uncertaintyParts: { regression: 0.02, background: 0.01, model: 0.01 },
    ...over,
  }
}

/** A decay known only as a lower bound (very fast room). */
export const atLeast = (night: string, lowPerHour: number, over: Partial<RoomEstimate> = {}) =>
  estimate(night, 1, {
    kind: 'at-least',
    airChangeRatePerHour: null,
    airChangeRateLowPerHour: lowPerHour,
    airChangeRateHighPerHour: null,
    quality: 'doubtful',
    reasons: ['too-fast'],
    uncertaintyParts: null,
    ...over,
  })

/** A decay known only as an upper bound (very slow room). */
export const atMost = (night: string, highPerHour: number, over: Partial<RoomEstimate> = {}) =>
  atLeast(night, 1, {
    kind: 'at-most',
    airChangeRateLowPerHour: null,
    airChangeRateHighPerHour: highPerHour,
    reasons: ['too-slow'],
    ...over,
  })
