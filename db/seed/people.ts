import type { Role } from '@/lib/policy/roles'
import { putPerson } from '../changes/people'
import type { Tx } from '../client'

type DemoPerson = {
  email: string
  name: string
  roles: readonly Role[]
  /** sees this building only, or this tenancy only */
  restrictedTo?: 'building' | 'tenancy'
}

/** The people of the demo, one for each role, one with two roles, one restricted to a building. Invented names. */
export const DEMO_PEOPLE: readonly DemoPerson[] = [
  { email: 'operator@sallow-mill.example', name: 'Ines Marlowe', roles: ['operator'] },
  { email: 'engineer@sallow-mill.example', name: 'Tobias Renn', roles: ['engineer'] },
  {
    email: 'tenant@weir-learning.example',
    name: 'Amara Holt',
    roles: ['tenant'],
    restrictedTo: 'tenancy',
  },
  { email: 'installer@sallow-mill.example', name: 'Piet Lindqvist', roles: ['installer'] },
  { email: 'admin@sallow-mill.example', name: 'Ruth Calloway', roles: ['administrator'] },
  { email: 'duty@sallow-mill.example', name: 'Noor Vesely', roles: ['operator', 'engineer'] },
  {
    email: 'night.desk@sallow-mill.example',
    name: 'Callum Frost',
    roles: ['operator'],
    restrictedTo: 'building',
  },
]

/** Adds the demo's people, or puts them right; all share one password. Idempotent, and a second run with the same hash ends no session. */
export async function seedDemoPeople(
  tx: Tx,
  place: { organizationId: number; buildingId: number; tenancyId: number; passwordHash: string },
): Promise<void> {
  const { organizationId, buildingId, tenancyId, passwordHash } = place
  for (const { restrictedTo, ...person } of DEMO_PEOPLE) {
    await putPerson(
      tx,
      {
        ...person,
        organizationId,
        passwordHash,
        buildingIds: restrictedTo === undefined ? null : [buildingId],
        tenancyId: restrictedTo === 'tenancy' ? tenancyId : null,
        isDemo: true,
      },
      null,
    )
  }
}
