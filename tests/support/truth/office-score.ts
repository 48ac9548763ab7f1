import { secondsOf } from './answer'
import type { TruthBuilding } from './building'
import { localTimeS } from './calendar'
import { GROSS, type Judgement } from './judge'
import { type Expectation, STORIES } from './office'

export type StoryScore = {
  story: string
  words: string
  evenings: number
  right: number
  wrong: number
  doubtful: number
  silent: number
  /** evenings that came out as a careful analyst would have them */
  asItShould: number
}

const WORDS: Record<Expectation, string> = {
  figure: 'gives a figure',
  silence: 'accepts none',
  care: 'may, but never a wrong one',
}

type Outcome = 'right' | 'wrong' | 'doubtful' | 'silent'

function asExpected(expectation: Expectation, outcome: Outcome): boolean {
  if (expectation === 'figure') return outcome === 'right'
  if (expectation === 'silence') return outcome === 'silent' || outcome === 'doubtful'
  return outcome !== 'wrong'
}

/** What came of each evening (15:00 to 06:00 local) of each story, in counts. */
export function scoreOffice(building: TruthBuilding, judgement: Judgement): StoryScore[] {
  return Object.entries(STORIES).map(([story, told], index) => {
    const room = building.rooms[index]!
    const outcomes = building.dates.map((date): Outcome => {
      const fromS = localTimeS(building.zone, date, 15)
      const toS = localTimeS(building.zone, date, 30)
      const about = judgement.verdicts.filter((v) => {
        const startS = secondsOf(v.answer.start)
        return v.room === room && startS >= fromS && startS < toS && v.answer.quality !== 'refused'
      })
      const accepted = about.filter((v) => v.answer.quality === 'accepted')
      const off = (error: number | null) => error !== null && Math.abs(error) > GROSS
      if (accepted.some((v) => off(v.error) || v.noDecay)) return 'wrong'
      if (accepted.length > 0) return 'right'
      return about.length > 0 ? 'doubtful' : 'silent'
    })
    const count = (outcome: Outcome) => outcomes.filter((o) => o === outcome).length
    return {
      story,
      words: WORDS[told.expect],
      evenings: outcomes.length,
      right: count('right'),
      wrong: count('wrong'),
      doubtful: count('doubtful'),
      silent: count('silent'),
      asItShould: outcomes.filter((o) => asExpected(told.expect, o)).length,
    }
  })
}
