import { useId } from 'react'
import type { RoomState } from '@/lib/air/room-state'

export type GlassState = RoomState

/** Where the glass's rim stands, as a multiple of the limit; so the limit sits at two thirds of the height in every glass. */
const RIM = 1.5

export type LevelGlassProps = {
  /** 0 is outdoor air, 1 the limit; for `no signal` the last level that was heard, null if none */
  level: number | null
  state: GlassState
  widthPx: number
  heightPx: number
  /** how far the limit line stands out on both sides */
  lipPx?: number
  /** levels every 10 min since people left, the first at leaving */
  ebbMarks?: readonly number[]
  className?: string
}

type Box = {
  left: number
  right: number
  top: number
  bottom: number
  corner: number
  y: (level: number) => number
}

function boxOf(width: number, height: number): Box {
  const inset = 2.4
  const perLevel = (height - 3) / RIM
  return {
    left: 1 + inset,
    right: width - 1 - inset,
    top: 3,
    bottom: height - 1 - inset,
    corner: Math.max(1.5, Math.min(5, width / 3) - 2),
    y: (level) => height - 2 - Math.max(0, Math.min(RIM, level)) * perLevel,
  }
}

/** The body of water from `y` down to the rounded bottom, with a surface bowed by `bow`. */
function bodyPath(box: Box, y: number, bow: number): string {
  const { left, right, bottom, corner } = box
  return `M${left} ${y}Q${(left + right) / 2} ${y + bow} ${right} ${y}V${bottom - corner}Q${right} ${bottom} ${right - corner} ${bottom}H${left + corner}Q${left} ${bottom} ${left} ${bottom - corner}Z`
}

/** Water in two parts, below and above the limit line; it moves as one, so that a new reading slides to its height. */
function Water({ box, level, state, width }: { box: Box; level: number; state: GlassState; width: number }) {
  const id = useId()
  const y = Math.min(box.y(Math.min(level, RIM - 0.02)), box.bottom - 3)
  const bow = Math.min(3.2, width / 6)
  const limitY = box.y(1)
  const surface = `M${box.left} 0Q${(box.left + box.right) / 2} ${bow} ${box.right} 0`
  const depth = box.bottom - box.top + bow
  const near = state === 'near the limit'
  const parts = [
    {
      key: 'below',
      d: bodyPath(box, limitY, 0),
      fill: near ? 'url(#p-near)' : 'var(--tide)',
      line: near ? 'var(--deep)' : 'var(--tide)',
    },
    {
      key: 'above',
      d: `M${box.left} ${box.top - 3}H${box.right}V${limitY}H${box.left}Z`,
      fill: 'url(#p-over)',
      line: 'var(--silt)',
    },
  ]
  return parts.map((part) => (
    <g key={part.key} clipPath={`url(#${id}-${part.key})`}>
      <clipPath id={`${id}-${part.key}`}>
        <path d={part.d} />
      </clipPath>
      <g className="level-move" style={{ transform: `translateY(${y}px)` }}>
        <path d={`${surface}V${depth}H${box.left}Z`} style={{ fill: part.fill }} />
        <path d={surface} fill="none" style={{ stroke: part.line }} strokeWidth="1.6" />
      </g>
    </g>
  ))
}

/** A clouded glass: stipple to the rim, with the level it claims. */
function Clouded({ box, level }: { box: Box; level: number | null }) {
  const y = level === null ? null : Math.min(box.y(level), box.bottom - 3)
  return (
    <>
      <path d={bodyPath(box, box.top, 0)} style={{ fill: 'url(#p-suspect)' }} />
      {y !== null && (
        <path d={`M${box.left} ${y}H${box.right}`} style={{ stroke: 'var(--fog)' }} strokeWidth="1.6" />
      )}
    </>
  )
}

/** Where the level stood every 10 min since people left: the first full width, then 62 %. */
function EbbMarks({ box, marks, level }: { box: Box; marks: readonly number[]; level: number }) {
  const surfaceY = box.y(level)
  return marks.map((mark, i) => {
    const y = box.y(mark)
    if (y >= surfaceY - 1.6) return null
    const end = i === 0 ? box.right : box.left + (box.right - box.left) * 0.62
    return (
      <path
        key={i}
        d={`M${box.left} ${y}H${end}`}
        style={{ stroke: 'var(--tide)' }}
        strokeWidth="1.5"
        fill="none"
      />
    )
  })
}

/**
 * The level glass: a tall vessel whose fill is (C − outdoor) / (limit − outdoor), with the limit as a fine line across it. Drawn only;
 * the words beside it say the same.
 */
export function LevelGlass({
  level,
  state,
  widthPx,
  heightPx,
  lipPx = 6,
  ebbMarks = [],
  className,
}: LevelGlassProps) {
  const box = boxOf(widthPx, heightPx)
  const quiet = state === 'no signal' || state === 'sensor suspect'
  const stroke = quiet ? 'var(--fog)' : 'var(--ink)'
  const bottom = heightPx - 1
  const radius = Math.min(5, widthPx / 3)
  const limitY = Math.round(box.y(1)) + 0.5
  const overhang = `M${1 - lipPx} ${limitY}H${widthPx + lipPx - 1}`
  return (
    <svg
      width={widthPx}
      height={heightPx}
      viewBox={`0 0 ${widthPx} ${heightPx}`}
      aria-hidden="true"
      className={className}
    >
      {state === 'sensor suspect' && <Clouded box={box} level={level} />}
      {state === 'no signal' && level !== null && (
        <path
          d={`M${box.left} ${box.y(level)}H${box.right}`}
          style={{ stroke: 'var(--fog)' }}
          strokeWidth="1.5"
          strokeDasharray="2 2.5"
        />
      )}
      {!quiet && level !== null && <Water box={box} level={level} state={state} width={widthPx} />}
      {state === 'falling' && level !== null && <EbbMarks box={box} marks={ebbMarks} level={level} />}
      <path
        d={`M1 1V${bottom - radius}Q1 ${bottom} ${1 + radius} ${bottom}H${widthPx - 1 - radius}Q${widthPx - 1} ${bottom} ${widthPx - 1} ${bottom - radius}V1`}
        fill="none"
        style={{ stroke }}
        strokeWidth="1.25"
        strokeDasharray={state === 'no signal' ? '3 2.6' : undefined}
      />
      {!quiet && level !== null && level > 1 && (
        <path d={overhang} style={{ stroke: 'var(--paper)' }} strokeWidth="3.4" fill="none" />
      )}
      <path d={overhang} style={{ stroke }} strokeWidth="1.25" fill="none" />
    </svg>
  )
}
