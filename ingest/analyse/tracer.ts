/** `--tracer test.json`: one planned tracer test in, ages of air out, as JSON on standard output. */
import { agesOfAir, type Estimate, TRACER_WARNING_SENTENCES, type TracerResult } from '@/lib/air/age-of-air'
import { InputError } from './problems'
import { readTracerFile } from './tracer-file'

const significant = (value: number | null | undefined) =>
  value === null || value === undefined ? null : Number(value.toPrecision(6))

/** `name`, `name_low`, `name_high`; all null where there is no figure. */
function withLimits(name: string, figure: Estimate | null): Record<string, number | null> {
  return {
    [name]: significant(figure?.value),
    [`${name}_low`]: significant(figure?.low),
    [`${name}_high`]: significant(figure?.high),
  }
}

/** The result in the shape the command promises. */
export function tracerRecord(result: TracerResult): Record<string, unknown> {
  const points = Object.entries(result.points).map(([name, { localMeanAgeS, localIndex }]) => [
    name,
    { ...withLimits('local_mean_age_s', localMeanAgeS), ...withLimits('local_index', localIndex) },
  ])
  return {
    ...withLimits('nominal_time_s', result.nominalTimeS),
    ...withLimits('room_mean_age_s', result.roomMeanAgeS),
    ...withLimits('effectiveness_coefficient', result.effectivenessCoefficient),
    ...withLimits('air_change_efficiency_pct', result.airChangeEfficiencyPct),
    points: Object.fromEntries(points),
    tail_share: significant(result.tailShare),
    warnings: result.warnings,
  }
}

/**
 * Reads one test, prints its result on standard output and returns the exit code: 0 with a result (each warning also as a sentence on
 * standard error), 2 with one line per problem on standard error naming file, line and what was expected.
 */
export async function runTracer(path: string): Promise<number> {
  const say = (line: string) => process.stderr.write(`${line}\n`)
  try {
    const result = agesOfAir(readTracerFile(path, say))
    for (const warning of result.warnings) say(`${path}: ${warning}: ${TRACER_WARNING_SENTENCES[warning]}`)
    process.stdout.write(`${JSON.stringify(tracerRecord(result), null, 2)}\n`)
    return 0
  } catch (error) {
    if (error instanceof InputError) for (const problem of error.problems) say(problem)
    else if (error instanceof RangeError) say(`${path}:1: ${error.message}`)
    else throw error
    return 2
  }
}
