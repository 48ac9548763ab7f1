import { REASON_WORDS } from '../air/decay/explain'
import type { Reason } from '../air/types'

/** Reasons joined in one phrase: "somebody seems to have been in the room, and readings are missing in the middle of it". */
export function reasonsPhrase(reasons: readonly Reason[]): string {
  const words = reasons.map((reason) => REASON_WORDS[reason])
  return words.length <= 1 ? (words[0] ?? '') : `${words.slice(0, -1).join(', ')}, and ${words.at(-1)}`
}
