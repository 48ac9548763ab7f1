// Passwords of this installation, made once, readable by its owner only.
import { randomBytes } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'

/** @typedef {{ superuserPassword: string, ownerPassword: string, appPassword: string, sessionSecret: string }} Secrets */

/** @param {string} dataDir @returns {Secrets} */
export function ensureSecrets(dataDir) {
  const file = path.join(dataDir, 'secrets.json')
  if (fs.existsSync(file)) return JSON.parse(fs.readFileSync(file, 'utf8'))
  const word = () => randomBytes(24).toString('base64url')
  const secrets = {
    superuserPassword: word(),
    ownerPassword: word(),
    appPassword: word(),
    sessionSecret: randomBytes(48).toString('base64url'),
  }
  fs.writeFileSync(`${file}.new`, JSON.stringify(secrets, null, 2), { mode: 0o600 })
  fs.renameSync(`${file}.new`, file) // whole or not at all
  return secrets
}
