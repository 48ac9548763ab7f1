import { sql } from 'drizzle-orm'
import { addFeed } from '@/db/changes/feeds'
import type { Database } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import type { FeedMapping } from '@/lib/wire/feed'
import type { SmallOrganization } from './small-building'

/** Readings as `{ "co2": 612 }` under the device id in the second level of the topic. */
export const SMALL_MAPPING: FeedMapping = {
  items: null,
  device: { topicLevel: 2 },
  time: null,
  co2: { pointer: '/co2', unit: 'ppm', scale: 1 },
  temp: null,
  rh: null,
  battery: null,
  rssi: null,
}

/** A feed of a small organisation, switched off; answers its public id. */
export async function addSmallFeed(
  database: Database,
  { organizationId, buildingId, people }: SmallOrganization,
  brokerUrl = 'mqtt://127.0.0.1:1',
): Promise<string> {
  const publicId = newPublicId()
  await database.asSystem('test: a feed', async (tx) => {
    const found = await tx.execute<{ id: number }>(
      sql`SELECT id FROM users WHERE email = ${people.administrator}`,
    )
    const actor = { organizationId, userId: found.rows[0]!.id }
    await addFeed(tx, actor, {
      publicId,
      buildingId,
      name: 'plant room gateway',
      brokerUrl,
      userName: null,
      passwordSealed: null,
      caPem: null,
      topicFilter: 'plant/+',
      mapping: SMALL_MAPPING,
      now: new Date(),
    })
  })
  return publicId
}
