import { randomBytes } from 'node:crypto'
import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import fc from 'fast-check'
import { afterAll, describe, expect, it } from 'vitest'
import { keyOfFile, seal, unseal } from '@/lib/server/seal'

const key = randomBytes(32)

describe('sealed text', () => {
  it('opens with its key and purpose to what it was', () => {
    fc.assert(
      fc.property(
        fc.string({ unit: 'binary' }),
        (text) => unseal(seal(text, 'feed a', key), 'feed a', key) === text,
      ),
    )
  })
  it('shows nothing of the text and is another each time', () => {
    const first = seal('sluice gate', 'feed a', key)
    expect(first).not.toBe(seal('sluice gate', 'feed a', key))
    expect(Buffer.from(first.split('.')[3]!, 'base64url').toString('latin1')).not.toContain('sluice')
  })
  it('does not open with another key, for another row, or changed by a bit', () => {
    const sealed = seal('sluice gate', 'feed a', key)
    const parts = sealed.split('.')
    const bytes = Buffer.from(parts[3]!, 'base64url')
    bytes[0]! ^= 1
    const changed = [...parts.slice(0, 3), bytes.toString('base64url')].join('.')
    for (const attempt of [
      () => unseal(sealed, 'feed a', randomBytes(32)),
      () => unseal(sealed, 'feed b', key),
      () => unseal(changed, 'feed a', key),
      () => unseal('v1.x', 'feed a', key),
    ])
      expect(attempt).toThrow(/does not open with this key/)
  })
})

describe('the key file', () => {
  const dir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-key-'))
  afterAll(() => fs.rmSync(dir, { recursive: true }))
  it('is made once, for its owner alone', () => {
    const file = path.join(dir, 'inner', 'secret.key')
    const made = keyOfFile(file)
    expect(made).toHaveLength(32)
    expect(keyOfFile(file)).toEqual(made)
    expect(fs.statSync(file).mode & 0o777).toBe(0o600)
    expect(fs.readdirSync(path.dirname(file))).toEqual(['secret.key'])
  })
  it('that is no key is named', () => {
    fs.writeFileSync(path.join(dir, 'bad.key'), 'short')
    expect(() => keyOfFile(path.join(dir, 'bad.key'))).toThrow(/bad.key is no key/)
  })
})
