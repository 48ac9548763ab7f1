import { isIP } from 'node:net'

/**
 * The network address a request came from: the last entry of X-Forwarded-For, which the nearest proxy (or, without one, the web
 * server itself) wrote; earlier entries are whatever the caller claims. null when there is none that is an address.
 */
export function addressIn(headers: Headers): string | null {
  const last = headers.get('x-forwarded-for')?.split(',').at(-1)?.trim() ?? ''
  const plain = last.replace(/^::ffff:/i, '')
  return isIP(plain) ? plain : null
}
