const DAY_MS = 86_400_000

/** The instant from which on readings are kept; null where everything is. */
export function keptSince(now: Date, keptDays: number | null): Date | null {
  return keptDays === null ? null : new Date(now.getTime() - keptDays * DAY_MS)
}

/** What the deployment keeps where an organisation says nothing: days, null keeps everything. */
export type Defaults = { readingsKeptDays: number | null; rollupsKeptDays: number | null }

type Own = { readingsKeptDays: number | null; rollupsKeptDays: number | null }

/** Days that anyone in the deployment keeps readings for; null where somebody keeps them for ever, or nobody is there yet. */
export function longestKept(organizations: readonly Own[], defaults: Defaults): number | null {
  const periods = organizations.map((own) => own.readingsKeptDays ?? defaults.readingsKeptDays)
  return periods.length === 0 || periods.includes(null) ? null : Math.max(...(periods as number[]))
}

/** Days that an organisation's roll-ups are kept: never shorter than its readings; null for ever. */
export function rollupsKept(own: Own, defaults: Defaults): number | null {
  const asked = own.rollupsKeptDays ?? defaults.rollupsKeptDays
  const readings = own.readingsKeptDays ?? defaults.readingsKeptDays
  return asked === null || readings === null ? null : Math.max(asked, readings)
}
