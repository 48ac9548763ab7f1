import { REASONS_THAT_INFORM } from '../support/truth/answer'
import type { Judgement, Verdict } from '../support/truth/judge'
import { percent, printTable } from './report'

export type Doubt = {
  reasons: string
  figures: number
  /** of true evenings that got no accepted figure */
  ofEvenings: number
  within10: number
  beyond20: number
  covered: number
}

const share = (list: readonly Verdict[], is: (v: Verdict) => boolean) => list.filter(is).length / list.length

/** What each set of reasons for doubt costs and saves: how many figures it holds back, and how many of those were wrong. */
export function weighDoubts(judgements: readonly Judgement[]): Doubt[] {
  const sets = new Map<string, Verdict[]>()
  for (const verdict of judgements.flatMap((j) => j.verdicts)) {
    if (verdict.answer.quality !== 'doubtful' || verdict.error === null || verdict.room.draft.neighbour)
      continue
    const reasons = verdict.answer.reasons.filter((reason) => !REASONS_THAT_INFORM.includes(reason))
    const key = reasons.sort().join(' + ') || '(none)'
    sets.set(key, [...(sets.get(key) ?? []), verdict])
  }
  return [...sets]
    .map(([reasons, list]) => ({
      reasons,
      figures: list.length,
      ofEvenings: list.filter((v) => v.evening?.answerable).length,
      within10: share(list, (v) => Math.abs(v.error!) < 0.1),
      beyond20: share(list, (v) => Math.abs(v.error!) > 0.2),
      covered: share(list, (v) => v.covered === true),
    }))
    .sort((a, b) => b.figures - a.figures)
}

/** Prints the ten commonest. */
export function printDoubts(doubts: readonly Doubt[]) {
  printTable(
    ['doubtful because of', 'figures', 'of real evenings', 'within 10 %', 'beyond 20 %', 'interval holds'],
    doubts
      .slice(0, 10)
      .map((d) => [
        d.reasons,
        String(d.figures),
        String(d.ofEvenings),
        percent(d.within10, 0),
        percent(d.beyond20, 0),
        percent(d.covered, 0),
      ]),
  )
}
