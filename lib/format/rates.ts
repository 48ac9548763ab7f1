/** An air-change rate as words, 1/h: two significant figures ("0.23", "2.4", "12"). */
export function rateWords(ratePerHour: number): string {
  const size = Math.abs(ratePerHour)
  if (size >= 9.95) return ratePerHour.toFixed(0)
  return ratePerHour.toFixed(size < 0.995 ? 2 : 1)
}

/** "2.2–2.6" for tables; an open end is "≥ 7.0" or "≤ 0.20"; a dash where nothing is known. */
export function intervalCell(low: number | null, high: number | null): string {
  if (low === null && high === null) return '–'
  if (high === null) return `≥ ${rateWords(low as number)}`
  if (low === null) return `≤ ${rateWords(high)}`
  return `${rateWords(low)}–${rateWords(high)}`
}

/** "2.2 to 2.6" for sentences; "at least 7.0", "at most 0.20"; empty where nothing is known. */
export function intervalWords(low: number | null, high: number | null): string {
  if (low === null && high === null) return ''
  if (high === null) return `at least ${rateWords(low as number)}`
  if (low === null) return `at most ${rateWords(high)}`
  return `${rateWords(low)} to ${rateWords(high)}`
}

/** An outdoor air flow in L/s: whole numbers from 10 on, one decimal below. */
export function flowWords(flowLps: number): string {
  return flowLps.toFixed(flowLps < 9.95 ? 1 : 0)
}

/** "+12 %", "−40 %" of a ratio around 0. */
export function percentWords(ratio: number): string {
  const percent = Math.round(Math.abs(ratio) * 100)
  return `${ratio < 0 && percent > 0 ? '−' : '+'}${percent} %`
}
