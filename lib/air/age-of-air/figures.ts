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
 * Ages from the moments: local mean age μ0 at a point; in the exhaust nominal time μ0, room mean age μ1/μ0 and their quotient, the
 * effectiveness coefficient. For decay and step-up alike, each with its own F.
 * @source Roulet ch. 3, eqs 3.10 to 3.12; Sandberg 1981 (from memory)
 */
export function figuresOf(test: NormalisedTest, rateFactor = 1): FiguresAndMoments {
  const momentsOf = (curve: NonNullable<NormalisedTest['exhaust']>) =>
    curveMoments(curve, test.floorDoubt, rateFactor)
  const exhaust = test.exhaust ? momentsOf(test.exhaust) : null
  const points = Object.fromEntries(
    Object.entries(test.points).map(([name, curve]) => [name, momentsOf(curve)]),
  )
  const nominalTimeS = exhaust?.decays ? exhaust.mu0 : Number.NaN
  const roomMeanAgeS = exhaust?.decays ? exhaust.mu1 / exhaust.mu0 : Number.NaN
  const ages = Object.fromEntries(
    Object.entries(points).map(([name, moments]) => [name, moments.decays ? moments.mu0 : Number.NaN]),
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
