const line = (stroke: string, width: number, length: number) => (
  <line x1="0" y1="0" x2="0" y2={length} style={{ stroke }} strokeWidth={width} />
)

/** The hatches that carry a state beside its colour; once a page, referred to by id. */
export function GlassPatterns() {
  const common = { patternUnits: 'userSpaceOnUse' } as const
  return (
    <svg width="0" height="0" className="absolute" aria-hidden="true" focusable="false">
      <defs>
        <pattern id="p-near" width="5" height="5" patternTransform="rotate(45)" {...common}>
          <rect width="5" height="5" style={{ fill: 'var(--deep)' }} opacity=".16" />
          {line('var(--deep)', 4.2, 5)}
        </pattern>
        <pattern id="p-over" width="3.6" height="3.6" patternTransform="rotate(-45)" {...common}>
          <rect width="3.6" height="3.6" style={{ fill: 'var(--silt)' }} />
          <line
            x1="0"
            y1="0"
            x2="0"
            y2="3.6"
            style={{ stroke: 'var(--paper)' }}
            strokeWidth="1.3"
            opacity=".6"
          />
        </pattern>
        <pattern id="p-suspect" width="5" height="5" {...common}>
          <circle cx="1.3" cy="1.3" r=".95" style={{ fill: 'var(--fog)' }} />
          <circle cx="3.8" cy="3.8" r=".95" style={{ fill: 'var(--fog)' }} />
        </pattern>
        <pattern id="p-decay" width="5" height="5" patternTransform="rotate(45)" {...common}>
          {line('var(--tide)', 1.5, 5)}
        </pattern>
        <pattern id="p-left" width="6" height="6" patternTransform="rotate(45)" {...common}>
          {line('var(--fog)', 0.9, 6)}
        </pattern>
      </defs>
    </svg>
  )
}
