/** Milliseconds before try number `tries` (from 0): doubling from `firstMs` up to `mostMs`, half of it by chance, so that many do not come at once. */
export function retryDelayMs(tries: number, firstMs: number, mostMs: number, random: () => number): number {
  const whole = Math.min(mostMs, firstMs * 2 ** Math.min(tries, 30))
  return whole / 2 + (whole / 2) * random()
}

/** Resolves after the time. */
export function pause(ms: number): Promise<void> {
  return new Promise((resolve) => setTimeout(resolve, ms))
}

/** The promise's result, or undefined when it has none after `ms`; the promise itself goes on, its later error is of no interest. */
export async function within<T>(promise: Promise<T>, ms: number): Promise<T | undefined> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<undefined>((resolve) => {
    timer = setTimeout(() => resolve(undefined), ms)
  })
  promise.catch(() => undefined)
  try {
    return await Promise.race([promise, late])
  } finally {
    clearTimeout(timer)
  }
}
