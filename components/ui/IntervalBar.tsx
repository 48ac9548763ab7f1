export type IntervalBarProps = {
  /** null where only bounds are known */
  value: number | null
  /** 95 % interval; an open end is null */
  low: number | null
  high: number | null
  /** what is asked; drawn as a full-height tick */
  basis?: number | null
  /** upper end of the column's common scale, which starts at 0 */
  max: number
  widthPx?: number
  /** a ring instead of a dot, for supply reduced or off */
  ring?: boolean
  /** what it shows, in words with unit */
  words: string
}

const HEIGHT = 20

/** Rate as a dot, 95 % interval as a bar, basis as a tick, on one scale a column. */
export function IntervalBar({ value, low, high, basis, max, widthPx = 200, ring, words }: IntervalBarProps) {
  const x = (v: number) => 1 + (Math.max(0, Math.min(max, v)) / max) * (widthPx - 3)
  const mid = HEIGHT / 2
  const known = low !== null || high !== null
  const left = low === null ? 1 : x(low)
  const right = high === null ? widthPx - 2 : x(high)
  const endLow = low !== null && low <= max
  const endHigh = high !== null && high <= max
  const ends = `${endLow ? `M${left} ${mid - 5}V${mid + 5}` : ''}${endHigh ? `M${right} ${mid - 5}V${mid + 5}` : ''}`
  return (
    <svg
      width={widthPx}
      height={HEIGHT}
      viewBox={`0 0 ${widthPx} ${HEIGHT}`}
      role="img"
      aria-label={words}
      className="block"
    >
      <path d={`M1 ${mid}H${widthPx - 2}`} stroke="var(--rule)" />
      {known && (
        <>
          <rect
            x={left}
            y={mid - 3}
            width={Math.max(2, right - left)}
            height="6"
            fill="var(--tide)"
            opacity=".3"
          />
          {ends && <path d={ends} stroke="var(--tide)" strokeWidth="1.25" />}
        </>
      )}
      {value !== null && (
        <circle
          cx={x(value)}
          cy={mid}
          r="3.6"
          fill={ring ? 'var(--paper)' : 'var(--tide)'}
          stroke="var(--tide)"
          strokeWidth={ring ? 1.5 : 0}
        />
      )}
      {basis !== null && basis !== undefined && (
        <path d={`M${x(basis)} 1V${HEIGHT - 1}`} stroke="var(--ink)" strokeWidth="1.5" />
      )}
    </svg>
  )
}

/** The ticks of the column's scale, for its head. */
export function IntervalScale({ max, widthPx = 200, step }: { max: number; widthPx?: number; step: number }) {
  const ticks = Array.from({ length: Math.floor(max / step) + 1 }, (_, i) => i * step)
  const x = (v: number) => 1 + (v / max) * (widthPx - 3)
  return (
    <svg width={widthPx} height="16" viewBox={`0 0 ${widthPx} 16`} aria-hidden="true" className="block">
      {ticks.map((tick, i) => (
        <text
          key={tick}
          x={x(tick)}
          y="12"
          textAnchor={i === 0 ? 'start' : x(tick) > widthPx - 12 ? 'end' : 'middle'}
          className="fig fill-ink-3 text-[11px]"
        >
          {tick}
        </text>
      ))}
    </svg>
  )
}
