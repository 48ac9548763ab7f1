export type SparklineProps = {
  /** one value a step, null where there is none */
  values: readonly (number | null)[]
  /** index at which a change was found; drawn as an upright before it */
  changeAt?: number | null
  basis?: number | null
  widthPx?: number
  heightPx?: number
  /** what it shows, in words */
  words: string
}

/** A small course without axis; gaps stay gaps. */
export function Sparkline({ values, changeAt, basis, widthPx = 96, heightPx = 22, words }: SparklineProps) {
  const known = values.filter((value): value is number => value !== null)
  const all = basis === null || basis === undefined ? known : [...known, basis]
  if (known.length === 0) return <span className="text-1 text-ink-3">no figures yet</span>
  const low = Math.min(...all) * 0.92
  const high = Math.max(...all) * 1.05 || 1
  const x = (i: number) => 2 + (values.length < 2 ? 0.5 : i / (values.length - 1)) * (widthPx - 6)
  const y = (v: number) => heightPx - 2 - ((v - low) / (high - low || 1)) * (heightPx - 4)
  let pen = 'M'
  let path = ''
  let last = -1
  values.forEach((value, i) => {
    if (value === null) {
      pen = 'M'
      return
    }
    path += `${pen}${x(i).toFixed(1)} ${y(value).toFixed(1)}`
    pen = 'L'
    last = i
  })
  return (
    <svg
      width={widthPx}
      height={heightPx}
      viewBox={`0 0 ${widthPx} ${heightPx}`}
      role="img"
      aria-label={words}
      className="block"
    >
      {basis !== null && basis !== undefined && (
        <path d={`M0 ${y(basis)}H${widthPx}`} stroke="var(--edge)" strokeDasharray="1 3" />
      )}
      <path
        d={path}
        fill="none"
        stroke="var(--ink)"
        strokeWidth="1.25"
        strokeLinejoin="round"
        strokeLinecap="round"
      />
      {changeAt !== null && changeAt !== undefined && changeAt >= 0 && (
        <path d={`M${x(changeAt - 0.5)} 0V${heightPx}`} stroke="var(--silt)" strokeWidth="1.5" />
      )}
      <circle cx={x(last)} cy={y(values[last] ?? 0)} r="2.2" fill="var(--ink)" />
    </svg>
  )
}
