import { createCipheriv, createDecipheriv, randomBytes } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'
import { env } from './env'

const algorithm = 'aes-256-gcm'
const version = 'v1'

/** The deployment's key of 32 bytes: EBBMARK_SECRET_KEY, else a file of the data folder that only its owner may read, made once. */
export function secretKey(): Buffer {
  const { EBBMARK_SECRET_KEY, EBBMARK_DATA_DIR } = env()
  if (EBBMARK_SECRET_KEY) return Buffer.from(EBBMARK_SECRET_KEY, 'hex')
  return keyOfFile(path.join(EBBMARK_DATA_DIR, 'secret.key'))
}

/** The key of a file; made where there is none, whole or not at all, also when two processes come at once. */
export function keyOfFile(file: string): Buffer {
  if (!fs.existsSync(file)) {
    fs.mkdirSync(path.dirname(file), { recursive: true })
    const own = `${file}.${process.pid}.${randomBytes(4).toString('hex')}`
    fs.writeFileSync(own, `${randomBytes(32).toString('hex')}\n`, { mode: 0o600 })
    try {
      fs.linkSync(own, file)
    } catch (error) {
      if ((error as NodeJS.ErrnoException).code !== 'EEXIST') throw error
    } finally {
      fs.rmSync(own)
    }
  }
  const text = fs.readFileSync(file, 'utf8').trim()
  if (!/^[0-9a-f]{64}$/i.test(text)) throw new Error(`${file} is no key: expected 64 hexadecimal digits.`)
  return Buffer.from(text, 'hex')
}

/** Encrypts a text with AES-256-GCM; it opens only with the same key and for the same `purpose` (e.g. the row it belongs to). */
export function seal(text: string, purpose: string, key: Buffer): string {
  const iv = randomBytes(12)
  const cipher = createCipheriv(algorithm, key, iv).setAAD(Buffer.from(purpose))
  const sealed = Buffer.concat([cipher.update(text, 'utf8'), cipher.final()])
  return [version, iv, cipher.getAuthTag(), sealed]
    .map((part) => (typeof part === 'string' ? part : part.toString('base64url')))
    .join('.')
}

/** Decrypts what `seal` made; throws one sentence where key, purpose or text are others. */
export function unseal(sealed: string, purpose: string, key: Buffer): string {
  const [of, iv, tag, text] = sealed.split('.')
  try {
    if (of !== version || iv === undefined || tag === undefined || text === undefined) throw new Error('form')
    const decipher = createDecipheriv(algorithm, key, Buffer.from(iv, 'base64url'), { authTagLength: 16 })
    decipher.setAAD(Buffer.from(purpose)).setAuthTag(Buffer.from(tag, 'base64url'))
    return Buffer.concat([decipher.update(Buffer.from(text, 'base64url')), decipher.final()]).toString('utf8')
  } catch {
    throw new Error(
      'The stored password does not open with this key (EBBMARK_SECRET_KEY or secret.key): type it in again.',
    )
  }
}
