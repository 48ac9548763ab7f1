import { statfs } from 'node:fs/promises'
import { env } from './env'

/** `tight` is a warning, `full` is when it begins to hurt: PostgreSQL stops taking readings on a full disk. */
export type DiskState = 'ample' | 'tight' | 'full'

export type Disk = { state: DiskState; freeBytes: number; totalBytes: number; freePct: number }

/** Judges a share of free space, percent, by the thresholds of the environment. */
export function diskStateOf(freePct: number, thresholds: { tightPct: number; fullPct: number }): DiskState {
  if (freePct < thresholds.fullPct) return 'full'
  return freePct < thresholds.tightPct ? 'tight' : 'ample'
}

/** Free space of the disk under the data folder; null where it cannot be asked (no such folder on this machine). */
export async function readDisk(): Promise<Disk | null> {
  const { EBBMARK_DATA_DIR, EBBMARK_DISK_TIGHT_PCT, EBBMARK_DISK_FULL_PCT } = env()
  try {
    const { bavail, blocks, bsize } = await statfs(EBBMARK_DATA_DIR)
    const [freeBytes, totalBytes] = [bavail * bsize, blocks * bsize]
    const freePct = totalBytes > 0 ? (100 * freeBytes) / totalBytes : 0
    const thresholds = { tightPct: EBBMARK_DISK_TIGHT_PCT, fullPct: EBBMARK_DISK_FULL_PCT }
    return { state: diskStateOf(freePct, thresholds), freeBytes, totalBytes, freePct }
  } catch {
    return null
  }
}

/** In words for a log line or a health part. */
export function diskSays({ state, freeBytes, freePct }: Disk): string {
  const free = `${(freeBytes / 1e9).toFixed(1)} GB free (${freePct.toFixed(0)} %)`
  if (state === 'ample') return free
  return state === 'tight' ? `tight: ${free}` : `nearly full: ${free}; readings will stop being stored`
}
