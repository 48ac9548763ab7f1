import { type GlassState, LevelGlass } from '@/components/ui/LevelGlass'

const entries: readonly { state: GlassState; level: number; marks?: readonly number[]; words: string }[] = [
  { state: 'in range', level: 0.55, words: 'in range' },
  { state: 'near the limit', level: 0.92, words: 'near the limit, from 85 % of the way' },
  { state: 'over the limit', level: 1.3, words: 'over the limit, 15 min mean' },
  {
    state: 'falling',
    level: 0.3,
    marks: [1, 0.72, 0.5],
    words: 'falling after people left, a mark every 10 min: wide gaps, quick air',
  },
  { state: 'no signal', level: 0.4, words: 'no signal' },
  { state: 'sensor suspect', level: 0.3, words: 'sensor suspect' },
]

/** How to read a glass. */
export function BoardKey() {
  return (
    <section
      aria-label="How to read a glass"
      className="mt-12 flex flex-wrap gap-x-[26px] gap-y-2 border-t border-rule pt-3 text-2 text-ink-2"
    >
      {entries.map(({ state, level, marks, words }) => (
        <span key={state} className="flex items-center gap-[9px]">
          <LevelGlass
            state={state}
            level={level}
            ebbMarks={marks}
            widthPx={14}
            heightPx={30}
            lipPx={3}
            className="flex-none"
          />
          {words}
        </span>
      ))}
    </section>
  )
}
