// What the start command prints: each step with its seconds.

const began = performance.now()

/** @param {string} line */
export function say(line) {
  const seconds = ((performance.now() - began) / 1000).toFixed(1).padStart(6)
  process.stdout.write(`${seconds} s  ${line}\n`)
}

/**
 * Runs one step and says how long it took.
 * @template T
 * @param {string} words
 * @param {() => Promise<T>} fn
 * @returns {Promise<T>}
 */
export async function step(words, fn) {
  const from = performance.now()
  const result = await fn()
  say(`${words} (${((performance.now() - from) / 1000).toFixed(1)} s)`)
  return result
}

/**
 * Ends the start with one clear message.
 * @param {unknown} error
 * @returns {never}
 */
export function fail(error) {
  process.stderr.write(
    `\nEbbmark could not start: ${error instanceof Error ? error.message : String(error)}\n`,
  )
  process.exit(1)
}
