/** One plain sentence for each result, in the product's words. */
import type { Decay, Mode, Reason } from '@/lib/air/types'

/** Each reason in plain words, as it stands after "because". */
export const REASON_WORDS: Readonly<Record<Reason, string>> = {
  'start-too-low': 'the room had too little CO2 above its background to tell a rate',
  'too-short': 'the room stayed empty for too short a time',
  'too-few-points': 'there are too few readings',
  gap: 'readings are missing in the middle of it',
  'people-present': 'somebody seems to have been in the room',
  'rate-changing': 'the air-change rate moved while CO2 was falling',
  'demand-controlled': 'the ventilation follows CO2 and slows as it falls',
  'background-unknown': 'the CO2 of the incoming air is not known well enough',
  'recirculation-possible': 'part of the supply may be air from other rooms, so this is a dilution rate',
  'neighbour-coupled': 'part of the air comes from the neighbouring room',
  'sensor-suspect': 'the sensor behaves oddly',
  saturated: 'the sensor was at the end of its range',
  clock: 'the sensor’s clock was moved',
  'too-fast': 'the room was aired faster than the sensor can follow',
  'too-slow': 'CO2 hardly fell',
  'not-identifiable': 'the readings fit more than one explanation',
}

const MODE_WORDS: Record<Mode, string> = {
  'supply on': 'with the supply on',
  'supply reduced': 'with the supply reduced',
  'supply off': 'with the supply off (infiltration and air from neighbouring rooms)',
  natural: 'with natural ventilation',
  unknown: 'in an unknown ventilation mode',
}

/** A rate to a sensible number of digits. */
export function rateWords(ratePerHour: number): string {
  return ratePerHour >= 10
    ? ratePerHour.toFixed(0)
    : ratePerHour >= 1
      ? ratePerHour.toFixed(1)
      : ratePerHour.toFixed(2)
}

function joinReasons(reasons: readonly Reason[]): string {
  return reasons.map((reason) => REASON_WORDS[reason]).join('; ')
}

type Explained = Pick<
  Decay,
  | 'kind'
  | 'quality'
  | 'reasons'
  | 'mode'
  | 'airChangeRatePerHour'
  | 'airChangeRateLowPerHour'
  | 'airChangeRateHighPerHour'
>

/** The sentence that goes with a result. */
export function explainDecay(decay: Explained): string {
  const because = decay.reasons.length > 0 ? `: ${joinReasons(decay.reasons)}` : ''
  if (decay.quality === 'refused') return `No figure${because || ': the readings do not tell one'}.`
  const where = MODE_WORDS[decay.mode]
  if (decay.kind === 'at-least')
    return `At least ${rateWords(decay.airChangeRateLowPerHour!)} air changes per hour ${where}${because}.`
  if (decay.kind === 'at-most')
    return `At most ${rateWords(decay.airChangeRateHighPerHour!)} air changes per hour ${where}${because}.`
  const span = `${rateWords(decay.airChangeRateLowPerHour!)} to ${rateWords(decay.airChangeRateHighPerHour!)}`
  if (decay.kind === 'range') return `Between ${span} air changes per hour ${where}${because}.`
  const doubt = decay.quality === 'doubtful' ? 'Doubtful: ' : ''
  const tail = because ? ` (${joinReasons(decay.reasons)})` : ''
  return `${doubt}${rateWords(decay.airChangeRatePerHour!)} air changes per hour (95 %: ${span}) ${where}${tail}.`
}
