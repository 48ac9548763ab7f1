import { randomBytes, randomInt } from 'node:crypto'
import { hash, verify } from '@node-rs/argon2'

/**
 * argon2id with 19 MiB, 2 passes, 1 lane: the first choice of the OWASP Password Storage Cheat Sheet (from memory) and above RFC 9106's
 * floor for a shared server. argon2id is the library's default algorithm.
 */
const cost = { memoryCost: 19_456, timeCost: 2, parallelism: 1 }

/** The hash to store for a password. */
export function hashPassword(password: string): Promise<string> {
  return hash(password, cost)
}

let nobody: Promise<string> | undefined

/**
 * Does the password fit the stored hash? Someone unknown (no hash) costs the same work: it is checked against the hash of a random
 * password, so neither the answer nor its time tells whether an e-mail is known.
 */
export async function passwordFits(
  storedHash: string | null | undefined,
  password: string,
): Promise<boolean> {
  nobody ??= hashPassword(randomBytes(24).toString('base64url'))
  const standIn = await nobody // awaited for everyone, so that the first unknown e-mail does not take longer
  const fits = await verify(storedHash ?? standIn, password)
  return fits && typeof storedHash === 'string'
}

const letters = 'abcdefghjkmnpqrstuvwxyz23456789'

/** A password that can be read aloud: words of the tide and ten random signs (49 bits). */
export function newPassword(): string {
  const signs = Array.from({ length: 10 }, () => letters[randomInt(letters.length)]).join('')
  return `ebb-and-flow-${signs.slice(0, 5)}-${signs.slice(5)}`
}
