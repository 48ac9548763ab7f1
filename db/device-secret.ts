import { createHash, randomBytes, timingSafeEqual } from 'node:crypto'

/** A new secret for a sensor or a gateway: 128 random bits as 32 hexadecimal digits, shown once and never stored. */
export function newDeviceSecret(): string {
  return randomBytes(16).toString('hex')
}

/** What is stored of a device's secret: SHA-256 of its bytes, hexadecimal. 128 random bits need no slow hash. */
export function deviceSecretSha256(secret: string | Uint8Array): string {
  return createHash('sha256').update(secret).digest('hex')
}

/** True where the secret is the one stored; takes the same time wherever they differ. */
export function isDeviceSecret(secret: Uint8Array, storedSha256: string): boolean {
  const given = createHash('sha256').update(secret).digest()
  const stored = Buffer.from(storedSha256, 'hex')
  return stored.length === given.length && timingSafeEqual(given, stored)
}
