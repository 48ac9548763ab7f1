import { asc, desc, eq, sql } from 'drizzle-orm'
import type pg from 'pg'
import type { FeedMapping } from '@/lib/wire/feed'
import type { FeedCandidate, FeedRefusal, FeedRow } from '@/lib/wire/feeds'
import type { Tx } from '../client'
import { buildings, feedCandidates, feeds, refusedMessages } from '../schema'

/** What a connection to a feed's broker needs. */
export type FeedSource = {
  publicId: string
  brokerUrl: string
  userName: string | null
  passwordSealed: string | null
  caPem: string | null
  topicFilter: string
  mapping: FeedMapping
}

/** A feed that a runner holds. */
export type LeasedFeed = FeedSource & {
  id: number
  organizationId: number
  buildingId: number
  changedMs: number
}

/**
 * Takes, keeps and answers the enabled feeds that this runner holds for the next `leaseS` seconds; those of a runner that has gone are
 * taken over when its lease has ended.
 */
export async function leaseFeeds(
  client: pg.ClientBase,
  { runner, leaseS }: { runner: string; leaseS: number },
): Promise<LeasedFeed[]> {
  const leased = await client.query<LeasedFeed>(
    `UPDATE feeds SET runner = $1, leased_until = now() + make_interval(secs => $2)
     WHERE enabled AND (runner = $1 OR leased_until IS NULL OR leased_until < now())
     RETURNING id, public_id AS "publicId", organization_id AS "organizationId", building_id AS "buildingId", broker_url AS "brokerUrl",
       user_name AS "userName", password_sealed AS "passwordSealed", ca_pem AS "caPem", topic_filter AS "topicFilter", mapping,
       (extract(epoch FROM changed_at) * 1000)::float8 AS "changedMs"`,
    [runner, leaseS],
  )
  return leased.rows
}

const seconds = (column: Parameters<typeof sql>[1]) =>
  sql<number | null>`extract(epoch FROM ${column})::float8`

const rowColumns = {
  id: feeds.publicId,
  name: feeds.name,
  building: buildings.name,
  brokerUrl: feeds.brokerUrl,
  topicFilter: feeds.topicFilter,
  enabled: feeds.enabled,
  connectedS: seconds(feeds.connectedAt),
  lastMessageS: seconds(feeds.lastMessageAt),
  lastError: feeds.lastError,
  lastErrorS: seconds(feeds.lastErrorAt),
  messages: feeds.messages,
  readings: feeds.readings,
  refusals: feeds.refusals,
}

/** The feeds in scope by name. */
export async function listFeeds(tx: Tx): Promise<FeedRow[]> {
  return tx
    .select(rowColumns)
    .from(feeds)
    .innerJoin(buildings, eq(buildings.id, feeds.buildingId))
    .orderBy(asc(feeds.name), asc(feeds.id))
}

/** One feed in scope with what it refused and whom it named without being registered; null where there is none. */
export async function getFeed(
  tx: Tx,
  { publicId }: { publicId: string },
): Promise<{
  row: FeedRow
  mapping: FeedMapping
  refusals: FeedRefusal[]
  candidates: FeedCandidate[]
} | null> {
  const [found] = await tx
    .select({ row: rowColumns, mapping: feeds.mapping, feedId: feeds.id })
    .from(feeds)
    .innerJoin(buildings, eq(buildings.id, feeds.buildingId))
    .where(eq(feeds.publicId, publicId))
  if (!found) return null
  const refusals = await tx
    .select({
      reason: refusedMessages.reason,
      detail: refusedMessages.detail,
      hourS: sql<number>`extract(epoch FROM ${refusedMessages.hour})::float8`,
      count: refusedMessages.count,
      sample: refusedMessages.sample,
    })
    .from(refusedMessages)
    .where(eq(refusedMessages.source, `feed ${publicId}`))
    .orderBy(desc(refusedMessages.hour), desc(refusedMessages.count))
    .limit(50)
  const candidates = await tx
    .select({
      deviceId: feedCandidates.deviceId,
      messages: feedCandidates.messages,
      lastS: sql<number>`extract(epoch FROM ${feedCandidates.lastAt})::float8`,
      lastCo2Ppm: feedCandidates.lastCo2Ppm,
    })
    .from(feedCandidates)
    .where(eq(feedCandidates.feedId, found.feedId))
    .orderBy(desc(feedCandidates.lastAt))
    .limit(100)
  return { row: found.row, mapping: found.mapping, refusals, candidates }
}

/** How a feed of the scope is connected to, for trying it. */
export async function getFeedSource(
  tx: Tx,
  { publicId }: { publicId: string },
): Promise<(FeedSource & { buildingId: number }) | null> {
  const [found] = await tx
    .select({
      publicId: feeds.publicId,
      buildingId: feeds.buildingId,
      brokerUrl: feeds.brokerUrl,
      userName: feeds.userName,
      passwordSealed: feeds.passwordSealed,
      caPem: feeds.caPem,
      topicFilter: feeds.topicFilter,
      mapping: feeds.mapping,
    })
    .from(feeds)
    .where(eq(feeds.publicId, publicId))
  return found ?? null
}
