import { and, eq } from 'drizzle-orm'
import type pg from 'pg'
import { Refusal } from '@/lib/errors'
import type { FeedMapping } from '@/lib/wire/feed'
import type { Tx } from '../client'
import { feedCandidates, feeds } from '../schema'
import { addAuditEvent } from './audit'
import { notifyLive } from './notice'

type Actor = { organizationId: number; userId: number }

export type NewFeed = {
  publicId: string
  buildingId: number
  name: string
  brokerUrl: string
  userName: string | null
  passwordSealed: string | null
  caPem: string | null
  topicFilter: string
  mapping: FeedMapping
  now: Date
}

/** Adds a feed, switched off. */
export async function addFeed(tx: Tx, actor: Actor, { now, ...feed }: NewFeed): Promise<void> {
  await tx.insert(feeds).values({
    ...feed,
    organizationId: actor.organizationId,
    createdBy: actor.userId,
    createdAt: now,
    changedAt: now,
  })
  const { publicId, name, brokerUrl, topicFilter, mapping } = feed
  await addAuditEvent(tx, {
    ...actor,
    action: 'feed.added',
    subjectKind: 'feed',
    subjectId: publicId,
    detail: { to: { name, brokerUrl, topicFilter, mapping } },
  })
}

/** Switches a feed on or off; the runner follows within seconds. */
export async function switchFeed(
  tx: Tx,
  actor: Actor,
  { publicId, enabled, now }: { publicId: string; enabled: boolean; now: Date },
): Promise<void> {
  const [changed] = await tx
    .update(feeds)
    .set({ enabled, changedAt: now, lastError: null, lastErrorAt: null })
    .where(and(eq(feeds.publicId, publicId), eq(feeds.enabled, !enabled)))
    .returning({ buildingId: feeds.buildingId })
  if (!changed)
    throw new Refusal(
      'conflict',
      `This feed is ${enabled ? 'on' : 'off'} already, or is no longer there. Load the page again.`,
    )
  await addAuditEvent(tx, {
    ...actor,
    action: enabled ? 'feed.switched-on' : 'feed.switched-off',
    subjectKind: 'feed',
    subjectId: publicId,
    detail: { from: { enabled: !enabled }, to: { enabled } },
  })
  await notifyLive(tx, 'feeds', [changed.buildingId])
}

/** Takes a feed away with its candidates; readings that came through it stay. */
export async function removeFeed(
  tx: Tx,
  actor: Actor,
  { publicId, name }: { publicId: string; name: string },
): Promise<void> {
  const [found] = await tx
    .select({ id: feeds.id, name: feeds.name, buildingId: feeds.buildingId, enabled: feeds.enabled })
    .from(feeds)
    .where(eq(feeds.publicId, publicId))
  if (!found) throw new Refusal('not-found', 'There is no such feed, or it is not yours to change.')
  if (found.name !== name.trim())
    throw new Refusal('invalid', 'Type the name of the feed to take it away.', {
      fields: { name: [`Type ${found.name} to confirm.`] },
    })
  await tx.delete(feedCandidates).where(eq(feedCandidates.feedId, found.id))
  await tx.delete(feeds).where(eq(feeds.id, found.id))
  await addAuditEvent(tx, {
    ...actor,
    action: 'feed.removed',
    subjectKind: 'feed',
    subjectId: publicId,
    detail: { from: { name: found.name, enabled: found.enabled } },
  })
  await notifyLive(tx, 'feeds', [found.buildingId])
}

/** What a runner has counted of a feed since it last wrote. Instants are epoch milliseconds. */
export type FeedProgress = {
  feedId: number
  messages: number
  readings: number
  refusals: number
  lastMessageMs: number | null
  /** undefined: as before; null: not connected */
  connectedMs: number | null | undefined
  error: { text: string; atMs: number } | null
  candidates: readonly {
    deviceId: string
    messages: number
    firstMs: number
    lastMs: number
    co2Ppm: number
  }[]
}

/** Candidates of one feed that are kept; a feed of a whole city must not fill the table. */
export const CANDIDATES_MAX = 500

/** Adds what a runner counted; candidates beyond the first 500 of a feed are not written down. */
export async function addFeedProgress(client: pg.ClientBase, progress: FeedProgress): Promise<void> {
  const at = (ms: number | null | undefined) => (ms === null || ms === undefined ? null : new Date(ms))
  const updated = await client.query(
    `UPDATE feeds SET messages = messages + $2, readings = readings + $3, refusals = refusals + $4,
       last_message_at = coalesce($5, last_message_at), connected_at = CASE WHEN $6 THEN $7 ELSE connected_at END,
       last_error = coalesce($8, last_error), last_error_at = coalesce($9, last_error_at) WHERE id = $1`,
    [
      progress.feedId,
      progress.messages,
      progress.readings,
      progress.refusals,
      at(progress.lastMessageMs),
      progress.connectedMs !== undefined,
      at(progress.connectedMs),
      progress.error?.text.slice(0, 500) ?? null,
      at(progress.error?.atMs),
    ],
  )
  // the feed may have been taken away meanwhile
  if (updated.rowCount === 0 || progress.candidates.length === 0) return
  await client.query(
    `INSERT INTO feed_candidates AS c (feed_id, device_id, messages, first_at, last_at, last_co2_ppm)
     SELECT $1, device_id, messages, first_at, last_at, last_co2_ppm
     FROM json_to_recordset($2) AS i(device_id text, messages bigint, first_at timestamptz, last_at timestamptz, last_co2_ppm text)
     WHERE (SELECT count(*) FROM feed_candidates k WHERE k.feed_id = $1) < $3
       OR EXISTS (SELECT FROM feed_candidates k WHERE k.feed_id = $1 AND k.device_id = i.device_id)
     ON CONFLICT (feed_id, device_id) DO UPDATE SET messages = c.messages + excluded.messages, last_at = excluded.last_at,
       last_co2_ppm = excluded.last_co2_ppm`,
    [
      progress.feedId,
      JSON.stringify(
        progress.candidates.map((each) => ({
          device_id: each.deviceId,
          messages: each.messages,
          first_at: new Date(each.firstMs),
          last_at: new Date(each.lastMs),
          last_co2_ppm: String(each.co2Ppm),
        })),
      ),
      CANDIDATES_MAX,
    ],
  )
}

/** Gives feeds back, so that another runner may take them at once; says that they are not connected. */
export async function releaseFeeds(
  client: pg.ClientBase,
  { runner, feedIds }: { runner: string; feedIds: readonly number[] },
): Promise<void> {
  await client.query(
    `UPDATE feeds SET runner = NULL, leased_until = NULL, connected_at = NULL WHERE runner = $1 AND id = ANY($2::int[])`,
    [runner, feedIds],
  )
}
