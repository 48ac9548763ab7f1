'use client'

import { localClock, localDate } from '@/lib/time'
import { type View, zoomed } from './view'

type Props = {
  zoomable: boolean
  view: View
  all: View
  show: (fromS: number, toS: number) => void
  /** instant and value under the pointer */
  cursor: { timeS: number; words: string } | null
  timeZone: string
}

/** Under the chart: zooming without a mouse or a keyboard, and what stands under the pointer. */
export function ChartControls({ zoomable, view, all, show, cursor, timeZone }: Props) {
  const isAll = view[0] === all[0] && view[1] === all[1]
  return (
    <div className="mt-[6px] flex min-h-[19px] flex-wrap items-baseline gap-4 text-2 text-ink-3">
      {zoomable && (
        <span className="no-print flex gap-[14px]">
          <ZoomWord words="Closer" onClick={() => show(...zoomed(view, 0.5, all))} />
          {!isAll && <ZoomWord words="Wider" onClick={() => show(...zoomed(view, 2, all))} />}
          {!isAll && <ZoomWord words="Show all of it" onClick={() => show(...all)} />}
        </span>
      )}
      {cursor && (
        <output className="fig text-1">
          {localDate(cursor.timeS, timeZone)} {localClock(cursor.timeS, timeZone)} · {cursor.words}
        </output>
      )}
    </div>
  )
}

function ZoomWord({ words, onClick }: { words: string; onClick: () => void }) {
  return (
    <button
      type="button"
      className="text-ink-2 underline decoration-edge underline-offset-[3px] max-sm:min-h-[44px]"
      onClick={onClick}
    >
      {words}
    </button>
  )
}
