const DAY_MS = 86_400_000

/** The instant from which on readings are kept; null where everything is. */
export function keptSince(now: Date, keptDays: number | null): Date | null {
  return keptDays === null ? null : new Date(now.getTime() - keptDays * DAY_MS)
}
