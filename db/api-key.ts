import { createHash, randomBytes } from 'node:crypto'

const pattern = /^ebb_[A-Za-z0-9_-]{32}$/

/** A new API key: 192 random bits, shown once; the database keeps its SHA-256 and the first signs, by which people tell keys apart. */
export function newApiKey(): { key: string; sha256: string; beginsWith: string } {
  const key = `ebb_${randomBytes(24).toString('base64url')}`
  return { key, sha256: apiKeySha256(key), beginsWith: key.slice(0, 10) }
}

/** What is stored of a key, hexadecimal. 192 random bits need no slow hash. */
export function apiKeySha256(key: string): string {
  return createHash('sha256').update(key).digest('hex')
}

/** True where the text has the form of a key. */
export function isApiKey(text: string): boolean {
  return pattern.test(text)
}
