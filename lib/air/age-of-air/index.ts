import { NORMAL_975 } from '@/lib/math/normal'
import { type FiguresAndMoments, figuresOf } from './figures'
import { levelsOff } from './floor'
import type { CurveMoments } from './moments'
import { type NormalisedTest, normaliseTest } from './normalise'
import type { Estimate, TracerResult, TracerTest, TracerWarning } from './types'
import { standardUncertainties } from './uncertainty'

export {
  type Estimate,
  type PointAges,
  type Sample,
  TRACER_WARNING_SENTENCES,
  TRACER_WARNINGS,
  type TracerResult,
  type TracerTest,
  type TracerWarning,
} from './types'

/** Share of a result beyond the record from which it is warned of (methods section 2.3). */
const MOST_TAIL_SHARE = 0.25
/** Nothing is claimed to be better known than this, relative (engineering choice: time stamps, interpolation). */
const LEAST_RELATIVE_UNCERTAINTY = 0.002
const MOST_COEFFICIENT = 2

/** Figure with its limits on the ln scale; capped where physics caps it. */
function estimate(value: number, sd: number | undefined, most = Number.POSITIVE_INFINITY): Estimate | null {
  if (!(value > 0) || !Number.isFinite(value)) return null
  const reach = Math.exp(NORMAL_975 * Math.max(sd ?? 0, LEAST_RELATIVE_UNCERTAINTY))
  return {
    value: Math.min(most, value),
    low: Math.min(most, value / reach),
    high: Math.min(most, value * reach),
  }
}

/** Tail share of the exhaust's first moment; without an exhaust, of the worst point's age. */
function tailShareOf({ exhaust, points }: FiguresAndMoments): number | null {
  if (exhaust) return exhaust.decays && exhaust.mu1 > 0 ? exhaust.tailMu1 / exhaust.mu1 : null
  const shares = Object.values(points)
    .filter((moments) => moments.decays && moments.mu0 > 0)
    .map((moments) => moments.tailMu0 / moments.mu0)
  return shares.length > 0 ? Math.max(...shares) : null
}

/** Warnings that need the figures: tail, recirculation, and the check against a known supply. */
function furtherWarnings(
  test: TracerTest,
  normalised: NormalisedTest,
  moments: FiguresAndMoments,
  nominal: Estimate | null,
) {
  const warnings: TracerWarning[] = []
  const all: CurveMoments[] = [
    ...(moments.exhaust ? [moments.exhaust] : []),
    ...Object.values(moments.points),
  ]
  if (all.some((one) => !one.decays)) warnings.push('no-decaying-tail')
  const pointTails = Object.values(moments.points).map((one) => (one.mu0 > 0 ? one.tailMu0 / one.mu0 : 0))
  if (Math.max(tailShareOf(moments) ?? 0, ...pointTails) > MOST_TAIL_SHARE) warnings.push('tail-share')
  const curves = [normalised.exhaust, ...Object.values(normalised.points)]
  if (
    test.kind === 'decay' &&
    curves.some((curve) => curve !== null && levelsOff(curve, normalised.backgroundDoubt))
  ) {
    warnings.push('recirculation')
  }
  if (test.supplyLps !== undefined && nominal) {
    const expected = (test.volumeM3 * 1000) / test.supplyLps
    // a tenth is left for the volume and the flow themselves
    if (expected < nominal.low / 1.1 || expected > nominal.high * 1.1) warnings.push('supply-mismatch')
  }
  return warnings
}

/**
 * Ages of air from one planned tracer test, decay or step-up, any tracer. From the exhaust: nominal time constant ∫F dt, room mean age
 * ∫tF dt / ∫F dt, effectiveness coefficient (their quotient, 0 to 2) and air change efficiency (half of it, in percent). From every
 * point: local mean age ∫F dt and local index (nominal time / local age). Intervals hold noise, background, start or final level, tail
 * and sampling step. Without an exhaust only local ages are given, and the index where the supplied flow is known.
 * @throws RangeError when the volume is not positive, no record is given, or the step has no size
 * @source Roulet, Ventilation and Airflow in Buildings, ch. 3, eqs 3.8 to 3.15; ISO 16000-8:2007 for local ages
 */
export function agesOfAir(test: TracerTest): TracerResult {
  if (!(test.volumeM3 > 0)) throw new RangeError(`volume must be positive, got ${test.volumeM3} m³`)
  const normalised = normaliseTest(test)
  const moments = figuresOf(normalised)
  const { figures } = moments
  const sd = standardUncertainties(test, normalised, moments)
  const nominal = estimate(figures.nominalTimeS, sd.get('nominal'))
  const coefficient = estimate(figures.coefficient, sd.get('coefficient'), MOST_COEFFICIENT)
  const half = (value: number) => 50 * value
  const fromSupply = !normalised.exhaust && test.supplyLps ? (test.volumeM3 * 1000) / test.supplyLps : null
  const points = Object.fromEntries(
    Object.entries(figures.ages).map(([name, age]) => {
      const localMeanAgeS = estimate(age, sd.get(`age:${name}`))
      const localIndex = fromSupply
        ? // volume and flow known to about 7 % together
          estimate(fromSupply / age, Math.hypot(sd.get(`age:${name}`) ?? 0, 0.07))
        : estimate(figures.indices[name] ?? Number.NaN, sd.get(`index:${name}`))
      return [name, { localMeanAgeS, localIndex }]
    }),
  )
  return {
    nominalTimeS: nominal,
    roomMeanAgeS: estimate(figures.roomMeanAgeS, sd.get('mean')),
    effectivenessCoefficient: coefficient,
    airChangeEfficiencyPct: coefficient && {
      value: half(coefficient.value),
      low: half(coefficient.low),
      high: half(coefficient.high),
    },
    points,
    tailShare: tailShareOf(moments),
    warnings: [...normalised.warnings, ...furtherWarnings(test, normalised, moments, nominal)],
  }
}
