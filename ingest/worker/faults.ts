/**
 * What a failed transaction means. `final`: PostgreSQL refuses this very data, trying again cannot help. `missing-month`: a partition
 * must be made first. `retry`: the store is away, full or busy; the data is good.
 */
export type StoreFault =
  | { kind: 'final'; error: Error }
  | { kind: 'missing-month'; error: Error }
  | { kind: 'retry'; error: Error }

/** Classes of SQLSTATE that speak about the data: 22 data exception, 23 integrity constraint violation, 54 limit exceeded. */
const finalClasses = ['22', '23', '54']

/** Sorts the error of a transaction by its SQLSTATE; an error without one is a lost connection. */
export function faultOf(thrown: unknown): StoreFault {
  const error = thrown instanceof Error ? thrown : new Error(String(thrown))
  const code = 'code' in error && typeof error.code === 'string' ? error.code : ''
  if (code === '23514' && error.message.includes('no partition of relation'))
    return { kind: 'missing-month', error }
  return code.length === 5 && finalClasses.includes(code.slice(0, 2))
    ? { kind: 'final', error }
    : { kind: 'retry', error }
}
