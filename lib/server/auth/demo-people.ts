import { existsSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import path from 'node:path'
import type { Database } from '@/db/client'
import { getDemoCredential } from '@/db/queries/people'
import { DEMO_PEOPLE, seedDemoPeople } from '@/db/seed/people'
import { hashPassword, newPassword, passwordFits } from './password'

/** What `.data/demo-people.json` holds: the password that all people of the demo share, and who they are. */
export type DemoPeople = { password: string; people: { email: string; name: string; roles: string[] }[] }

/**
 * Adds the demo's people and keeps their password, made at the first start, in `<dataDir>/demo-people.json` (readable by its owner
 * alone). Run again it changes nothing; with the file lost it makes a new password, which ends the demo's sessions.
 */
export async function ensureDemoPeople(
  database: Database,
  dataDir: string,
  place: { organizationId: number; buildingId: number; tenancyId: number },
): Promise<DemoPeople> {
  const file = path.join(dataDir, 'demo-people.json')
  const password = knownPassword(file) ?? newPassword()
  const first = DEMO_PEOPLE[0]?.email ?? ''
  const stored = await database.asSystem('demo people: look', (tx) => getDemoCredential(tx, { email: first }))
  const kept = stored?.passwordHash && (await passwordFits(stored.passwordHash, password))
  const passwordHash = kept ? (stored.passwordHash as string) : await hashPassword(password)
  await database.asSystem('demo people: seed', (tx) => seedDemoPeople(tx, { ...place, passwordHash }))
  const people = DEMO_PEOPLE.map(({ email, name, roles }) => ({ email, name, roles: [...roles] }))
  const demo = { password, people }
  writeFileSync(`${file}.new`, `${JSON.stringify(demo, null, 2)}\n`, { mode: 0o600 })
  renameSync(`${file}.new`, file)
  return demo
}

function knownPassword(file: string): string | undefined {
  if (!existsSync(file)) return undefined
  const { password } = JSON.parse(readFileSync(file, 'utf8')) as Partial<DemoPeople>
  return password
}
