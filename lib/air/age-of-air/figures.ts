import { type CurveMoments, curveMoments } from './moments'
import type { NormalisedTest } from './normalise'

/** Figures of one test without limits; NaN where a record gives none. */
export type Figures = {
  nominalTimeS: number
  roomMeanAgeS: number
  coefficient: number
  ages: Record<string, number>
  indices: Record<string, number>
}

export type FiguresAndMoments = {
  figures: Figures
  exhaust: CurveMoments | null
  points: Record<string, CurveMoments>
}

/**
 * Doubt of one record's tail rate, relative: its own bend, or half of how much faster it falls than the slowest record of the room, which
 * all of them must come to in the end.
 */
function tailDoubt(moments: CurveMoments, slowestPerS: number): number {
  if (!moments.tail) return 0
  const { rateDoubt, ratePerS } = moments.tail
  return Math.min(0.6, Math.max(rateDoubt, (ratePerS - slowestPerS) / (2 * ratePerS)))
}

/**
 * Ages from the moments: local mean age μ0 at a point; in the exhaust nominal time μ0, room mean age μ1/μ0 and their quotient, the
 * effectiveness coefficient. For decay and step-up alike, each with its own F.
 * @param tailSign 0 for the figures; −1 or 1 for those with every tail slower or faster by its doubt
 * @source Roulet ch. 3, eqs 3.10 to 3.12; Sandberg 1981 (from memory)
 */
export function figuresOf(test: NormalisedTest, tailSign: -1 | 0 | 1 = 0): FiguresAndMoments {
  const curves = [...(test.exhaust ? [test.exhaust] : []), ...Object.values(test.points)]
  const plain = curves.map((curve) => curveMoments(curve, test.floorDoubt))
  const slowest = Math.min(...plain.flatMap((one) => (one.tail ? [one.tail.ratePerS] : [])))
  const moments =
    tailSign === 0
      ? plain
      : curves.map((curve, i) =>
          curveMoments(curve, test.floorDoubt, (1 + tailDoubt(plain[i]!, slowest)) ** tailSign),
        )
  const exhaust = test.exhaust ? moments[0]! : null
  const ofPoints = test.exhaust ? moments.slice(1) : moments
  const points = Object.fromEntries(Object.keys(test.points).map((name, i) => [name, ofPoints[i]!]))
  const nominalTimeS = exhaust?.decays ? exhaust.mu0 : Number.NaN
  const roomMeanAgeS = exhaust?.decays ? exhaust.mu1 / exhaust.mu0 : Number.NaN
  const ages = Object.fromEntries(
    Object.entries(points).map(([name, one]) => [name, one.decays ? one.mu0 : Number.NaN]),
  )
  const indices = Object.fromEntries(Object.entries(ages).map(([name, age]) => [name, nominalTimeS / age]))
  const coefficient = nominalTimeS / roomMeanAgeS
  return { figures: { nominalTimeS, roomMeanAgeS, coefficient, ages, indices }, exhaust, points }
}

/** The figures as one flat list of named numbers, for propagating uncertainty. */
export function flatten(figures: Figures): Map<string, number> {
  const flat = new Map<string, number>([
    ['nominal', figures.nominalTimeS],
    ['mean', figures.roomMeanAgeS],
    ['coefficient', figures.coefficient],
  ])
  for (const [name, age] of Object.entries(figures.ages)) flat.set(`age:${name}`, age)
  for (const [name, index] of Object.entries(figures.indices)) flat.set(`index:${name}`, index)
  return flat
}
