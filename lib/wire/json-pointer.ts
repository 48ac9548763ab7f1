/** JSON Pointer (RFC 6901): where in a JSON value something stands, e.g. `/uplink/co2`, `/items/0/value`. */

const pattern = /^(?:\/(?:[^~/]|~[01])*)*$/

/** True where the text is a pointer: empty (the whole), or levels that each begin with a slash, `~` only as `~0` or `~1` (§3). */
export function isJsonPointer(text: string): boolean {
  return pattern.test(text)
}

/** The reference tokens of a pointer, unescaped (§4): first `~1` to `/`, then `~0` to `~`. */
export function pointerTokens(pointer: string): string[] {
  if (pointer === '') return []
  return pointer
    .slice(1)
    .split('/')
    .map((token) => token.replaceAll('~1', '/').replaceAll('~0', '~'))
}

const arrayIndex = /^(?:0|[1-9]\d*)$/

/**
 * What a pointer finds in a parsed JSON value (§4), undefined where it finds nothing. Array elements are named by their index without
 * leading zeros; `-` (past the end) finds nothing. Inherited properties are not looked at.
 */
export function atPointer(value: unknown, pointer: string): unknown {
  let found: unknown = value
  for (const token of pointerTokens(pointer)) {
    if (Array.isArray(found)) found = arrayIndex.test(token) ? found[Number(token)] : undefined
    else if (typeof found === 'object' && found !== null && Object.hasOwn(found, token))
      found = (found as Record<string, unknown>)[token]
    else return undefined
  }
  return found
}
