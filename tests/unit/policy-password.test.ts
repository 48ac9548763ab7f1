import { describe, expect, test, vi } from 'vitest'

const verify = vi.fn()
vi.mock('@node-rs/argon2', async (original) => {
  const real = await original<typeof import('@node-rs/argon2')>()
  verify.mockImplementation(real.verify)
  return { ...real, verify }
})

const { hashPassword, passwordFits } = await import('@/lib/server/auth/password')

/** The real argon2 runs; it is only watched, to count the work that an unknown person costs. */
describe('a password', () => {
  test('fits its own hash and no other', async () => {
    const hash = await hashPassword('Mond & Gezeiten ✓')
    expect(await passwordFits(hash, 'Mond & Gezeiten ✓')).toBe(true)
    expect(await passwordFits(hash, 'mond & gezeiten ✓')).toBe(false)
    expect(await passwordFits(hash, '')).toBe(false)
    expect(await hashPassword('Mond & Gezeiten ✓')).not.toBe(hash)
  })

  test('of someone unknown, or who has none, fits nothing and costs the same work', async () => {
    const hash = await hashPassword('known')
    const costOf = (phc: unknown) => /^\$argon2id\$v=19\$[^$]+/.exec(String(phc))?.[0]
    for (const stored of [undefined, null, hash]) {
      verify.mockClear()
      expect(await passwordFits(stored, 'a guess')).toBe(false)
      expect(verify).toHaveBeenCalledTimes(1)
      expect(costOf(verify.mock.calls[0]?.[0])).toBe('$argon2id$v=19$m=19456,t=2,p=1')
    }
  })
})
