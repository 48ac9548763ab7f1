import { randomBytes } from 'node:crypto'

const letters = '23456789abcdefghjkmnpqrstvwxyz'

/** A new public id: 16 signs of 30 (78 random bits), none of them easily confused. */
export function newPublicId(): string {
  return Array.from(randomBytes(32))
    .filter((byte) => byte < 240)
    .slice(0, 16)
    .map((byte) => letters[byte % letters.length])
    .join('')
}
