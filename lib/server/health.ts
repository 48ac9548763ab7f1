import {
  getBrokerHeartbeat,
  getLastReadingStored,
  listNewestNights,
  type NewestNight,
} from '@/db/queries/health'
import { addDays, localClock, localDate, localToEpochS } from '@/lib/time'
import { systemClock } from './clock'
import { database } from './database'
import { diskSays, readDisk } from './disk'
import { log } from './log'

/** The broker says that it lives every few seconds; after this long without a word it is not well. */
export const BROKER_SILENT_SECONDS = 30

/** A night is analysed at 04:00 local; an hour later it must be done. */
export const NIGHT_DUE_LOCAL = '05:00'

const DATABASE_TIMEOUT_MS = 3000

/** `tight`: well still, but not for long. */
type Part = { well: boolean; says: string; state?: 'tight' }

export type Health = {
  well: boolean
  at: string
  parts: { database: Part; broker: Part; lastNight: Part; disk: Part }
  /** ISO 8601, null when no reading was ever stored or the database does not answer */
  lastReadingStoredAt: string | null
}

/** How the deployment is: nothing in it is secret, and nothing names a building or a person. */
export async function currentHealth(): Promise<Health> {
  const now = systemClock.now()
  if (!(await database().answers(DATABASE_TIMEOUT_MS))) return withoutDatabase(now, await diskPart())
  try {
    const [heartbeat, lastReading, nights] = await database().asSystem('health', async (tx) => [
      await getBrokerHeartbeat(tx),
      await getLastReadingStored(tx),
      await listNewestNights(tx),
    ])
    const parts = {
      database: { well: true, says: 'answers' },
      broker: brokerPart(heartbeat, now),
      lastNight: nightPart(nights, now),
      disk: await diskPart(),
    }
    return {
      well: Object.values(parts).every((part) => part.well),
      at: now.toISOString(),
      parts,
      lastReadingStoredAt: lastReading?.toISOString() ?? null,
    }
  } catch (error) {
    log().error({ err: error }, 'health could not be read')
    return withoutDatabase(now, await diskPart())
  }
}

function withoutDatabase(now: Date, disk: Part): Health {
  const unknown = { well: false, says: 'not known while the database does not answer' }
  return {
    well: false,
    at: now.toISOString(),
    parts: {
      database: { well: false, says: `does not answer within ${DATABASE_TIMEOUT_MS / 1000} s` },
      broker: unknown,
      lastNight: unknown,
      disk,
    },
    lastReadingStoredAt: null,
  }
}

async function diskPart(): Promise<Part> {
  const disk = await readDisk()
  if (!disk) return { well: true, says: 'not on this machine' }
  const part = { well: disk.state !== 'full', says: diskSays(disk) }
  return disk.state === 'tight' ? { ...part, state: 'tight' } : part
}

function brokerPart(heartbeat: Date | null, now: Date): Part {
  if (!heartbeat) return { well: false, says: 'has never been heard of' }
  const seconds = Math.max(0, Math.round((now.getTime() - heartbeat.getTime()) / 1000))
  return { well: seconds <= BROKER_SILENT_SECONDS, says: `last heard of ${seconds} s ago` }
}

/** The newest local date whose night must be done by `now`, e.g. yesterday from 05:00 local on. */
export function newestDueNight(now: Date, timeZone: string): string {
  const nowS = now.getTime() / 1000
  const back = localClock(nowS, timeZone) >= NIGHT_DUE_LOCAL ? 1 : 2
  return addDays(localDate(nowS, timeZone), -back)
}

/** Is this building's newest due night done? One that came into being after the night began owes nothing yet. */
export function nightIsDone({ timeZone, createdAt, newestDone }: NewestNight, now: Date): boolean {
  const due = newestDueNight(now, timeZone)
  const existed = createdAt.getTime() / 1000 < localToEpochS(due, '00:00', timeZone)
  return (newestDone !== null && newestDone >= due) || !existed
}

function nightPart(nights: NewestNight[], now: Date): Part {
  const late = nights.filter((night) => !nightIsDone(night, now)).length
  if (late > 0) return { well: false, says: `not analysed for ${late} of ${nights.length} buildings` }
  return { well: true, says: `every night that was due is analysed (buildings: ${nights.length})` }
}
