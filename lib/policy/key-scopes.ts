/** What an API key may be allowed; apart from people's permissions, since no role holds them and no key holds those. */
export const KEY_SCOPES = {
  'readings.write': { says: 'Send readings of registered sensors.' },
} as const

export type KeyScope = keyof typeof KEY_SCOPES

/** True where the text is a scope of keys. */
export function isKeyScope(text: string): text is KeyScope {
  return Object.hasOwn(KEY_SCOPES, text)
}
