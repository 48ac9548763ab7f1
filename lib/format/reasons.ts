import type { Reason } from '../air/types'

/** Each reason in plain words, as it stands after "because". */
export const REASON_WORDS: Readonly<Record<Reason, string>> = {
  'start-too-low': 'the CO2 at the start was too little above the background',
  'too-short': 'it ended too soon',
  'too-few-points': 'there were too few readings',
  gap: 'readings are missing inside it',
  'people-present': 'someone was in the room',
  'rate-changing': 'the rate changed inside it',
  'demand-controlled': 'the supply follows the CO2, so there is no one rate',
  'background-unknown': 'the level it falls towards is not known well enough',
  'recirculation-possible': 'the air may be partly recirculated',
  'neighbour-coupled': 'air from a neighbouring room takes part',
  'sensor-suspect': 'the sensor is not to be trusted here',
  saturated: 'the sensor was at the top of its range',
  clock: 'the sensor’s clock jumped',
  'too-fast': 'the room empties faster than its readings can follow',
  'too-slow': 'it falls too slowly to be measured',
  'not-identifiable': 'the readings fit more than one rate',
}

/** Reasons joined in one phrase: "someone was in the room, and readings are missing inside it". */
export function reasonsPhrase(reasons: readonly Reason[]): string {
  const words = reasons.map((reason) => REASON_WORDS[reason])
  return words.length <= 1 ? (words[0] ?? '') : `${words.slice(0, -1).join(', ')}, and ${words.at(-1)}`
}
