/** Joins class names, leaving out what is not there. */
export function cx(...names: unknown[]): string {
  return names.filter((name) => typeof name === 'string' && name !== '').join(' ')
}
