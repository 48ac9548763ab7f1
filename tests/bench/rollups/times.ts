export type Times = { medianMs: number; worstMs: number; repeats: number }

type Stopwatch = (fn: () => Promise<unknown>) => Promise<void>

/**
 * Wall times of `repeats` runs after one that warms up. With a stopwatch only what runs inside it counts, else the whole call.
 */
export async function timesOf(
  repeats: number,
  fn: (stopwatch: Stopwatch) => Promise<unknown>,
): Promise<Times> {
  const times: number[] = []
  for (let run = 0; run <= repeats; run++) {
    let inside: number | undefined
    const from = performance.now()
    await fn(async (part) => {
      const began = performance.now()
      await part()
      inside = performance.now() - began
    })
    if (run > 0) times.push(inside ?? performance.now() - from)
  }
  times.sort((a, b) => a - b)
  return {
    medianMs: times[Math.floor(times.length / 2)] ?? Number.NaN,
    worstMs: times.at(-1) ?? Number.NaN,
    repeats,
  }
}
