/** One entry of the array that `npm run analyse` writes (contract, section 2). */
export type Answer = {
  room: string
  night: string
  start: string
  end: string
  kind: 'fit' | 'at-least' | 'at-most' | 'range'
  ach: number | null
  ach_low: number | null
  ach_high: number | null
  outdoor_ach_low?: number | null
  outdoor_ach_high?: number | null
  background_ppm?: number | null
  start_ppm?: number | null
  mode?: string
  mode_from?: string | null
  quality: 'accepted' | 'doubtful' | 'refused'
  reasons: string[]
  rate_change_at?: string | null
  rate_change_low?: string | null
  rate_change_high?: string | null
}

export const secondsOf = (iso: string) => Date.parse(iso) / 1000

/** Reasons that only say what air it is: they go with accepted figures too. */
export const REASONS_THAT_INFORM: readonly string[] = ['recirculation-possible', 'neighbour-coupled']
