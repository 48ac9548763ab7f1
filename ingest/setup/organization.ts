import { sql } from 'drizzle-orm'
import { putPerson } from '@/db/changes/people'
import type { Database } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import { organizations, users } from '@/db/schema'
import { hashPassword, newPassword } from '@/lib/server/auth/password'

const firstEmail = 'admin@ebbmark.example'

/** Without the demo: one empty organisation with one administrator, whose password is said once, at the first start. */
export async function prepareOrganization({
  database,
  say,
}: {
  database: Database
  say: (line: string) => void
}): Promise<void> {
  const known = await database.asSystem('first organisation: look', (tx) =>
    tx.select({ id: users.id }).from(users).limit(1),
  )
  if (known.length > 0) return
  const password = newPassword()
  const passwordHash = await hashPassword(password)
  await database.asSystem('first organisation', async (tx) => {
    await tx.execute(sql`SELECT pg_advisory_xact_lock(hashtext('ebbmark first organisation'))`)
    const [organization] = await tx
      .insert(organizations)
      .values({ publicId: newPublicId(), name: 'Your organisation' })
      .returning({ id: organizations.id })
    if (!organization) throw new Error('The first organisation could not be stored.')
    const person = {
      email: firstEmail,
      name: 'Administrator',
      roles: ['administrator'] as const,
      organizationId: organization.id,
      passwordHash,
      buildingIds: null,
      tenancyId: null,
      isDemo: false,
    }
    await putPerson(tx, person, null)
  })
  say(
    `  an empty organisation was made; its administrator signs in as ${firstEmail} with the password ${password}`,
  )
  say('  this password is shown this once: change it after signing in')
}
