import { drawsFor } from '../random'
import type { Body } from './generation'

/** Someone of the mill: a body that stays the same from day to day, and how lively they are (a factor on the activity's rate). */
export type Person = { id: string; body: Body; vigour: number }

/** Mean masses, kg, of the grown age groups of Persily & de Jonge (2017), table 4: [below age, male, female]. */
const MEAN_MASS_KG: readonly (readonly [number, number, number])[] = [
  [21, 77.3, 65.9],
  [30, 84.9, 71.9],
  [40, 87, 74.8],
  [50, 90.5, 77.1],
  [60, 89.5, 77.5],
  [70, 89.5, 76.8],
]

/** The person behind an id; the same seed and id give the same person every time. */
export function personOf(seed: number, id: string, youngest: number, oldest: number): Person {
  const draws = drawsFor(seed, 'person', id)
  const sex = draws.chance(0.5) ? 'male' : 'female'
  const ageYears = draws.whole(youngest, oldest)
  const row = MEAN_MASS_KG.find(([below]) => ageYears < below) ?? MEAN_MASS_KG[MEAN_MASS_KG.length - 1]!
  const mean = sex === 'male' ? row[1] : row[2]
  const massKg = mean * Math.exp(0.13 * Math.max(-2, Math.min(2, draws.normal())))
  const vigour = Math.exp(0.1 * Math.max(-2, Math.min(2, draws.normal())))
  return { id, body: { sex, ageYears, massKg }, vigour }
}
