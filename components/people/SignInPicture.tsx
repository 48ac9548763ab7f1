import { Mark } from '@/components/layout/Mark'

/** Times in hours of an imagined day, level as a share of the drawing's full height above outdoor. */
type Stretch = { from: number; to: number; towards: number; present: boolean }

const RATE_PER_HOUR = 1.7
const LIMIT = 0.62
const FIRST_HOUR = 7.6
const LAST_HOUR = 18.6
const STEP_HOURS = 0.04

/** People come and go three times; the third time too many for too long. */
const day: readonly Stretch[] = [
  { from: FIRST_HOUR, to: 9, towards: 0, present: false },
  { from: 9, to: 10.5, towards: 0.6, present: true },
  { from: 10.5, to: 11.4, towards: 0, present: false },
  { from: 11.4, to: 12.3, towards: 0.6, present: true },
  { from: 12.3, to: 13.4, towards: 0, present: false },
  { from: 13.4, to: 15.2, towards: 0.97, present: true },
  { from: 15.2, to: LAST_HOUR, towards: 0, present: false },
]

type Point = { hour: number; level: number }
type Drawn = Stretch & { points: Point[] }

/** A well-mixed room: within each stretch the level approaches its end exponentially, at one rate. */
function drawDay(): Drawn[] {
  let start = 0.012
  return day.map((stretch) => {
    const begin = start
    const at = (hour: number) =>
      stretch.towards + (begin - stretch.towards) * Math.exp(-RATE_PER_HOUR * (hour - stretch.from))
    const steps = Math.ceil((stretch.to - stretch.from) / STEP_HOURS)
    const points = Array.from({ length: steps + 1 }, (_, i) => {
      const hour = stretch.from + ((stretch.to - stretch.from) * i) / steps
      return { hour, level: at(hour) }
    })
    start = at(stretch.to)
    return { ...stretch, points }
  })
}

type Size = { width: number; height: number; left: number }

function DayDrawing({ size, id, labels }: { size: Size; id: string; labels: boolean }) {
  const { width, height, left } = size
  const x = (hour: number) => left + ((hour - FIRST_HOUR) / (LAST_HOUR - FIRST_HOUR)) * (width - left)
  const y = (level: number) => height - 2 - level * (height - 10)
  const at = ({ hour, level }: Point) => `${x(hour).toFixed(1)} ${y(level).toFixed(1)}`
  const line = (points: Point[]) => `M${points.map(at).join('L')}`
  const area = ({ points, from, to }: Drawn) =>
    `${line(points)}L${x(to).toFixed(1)} ${height}L${x(from).toFixed(1)} ${height}Z`
  const stretches = drawDay()
  const limitY = Math.round(y(LIMIT)) + 0.5
  return (
    <svg viewBox={`0 0 ${width} ${height}`} className="block w-full" aria-hidden="true" focusable="false">
      <clipPath id={`${id}-over`}>
        <rect x="0" y="-10" width={width} height={limitY + 10} />
      </clipPath>
      <clipPath id={`${id}-under`}>
        <rect x="0" y={limitY} width={width} height={height} />
      </clipPath>
      {stretches.map((stretch) =>
        stretch.present ? (
          <g key={stretch.from}>
            <path d={area(stretch)} style={{ fill: 'var(--tide)' }} clipPath={`url(#${id}-under)`} />
            <path d={area(stretch)} fill="url(#p-over)" clipPath={`url(#${id}-over)`} />
          </g>
        ) : (
          <g key={stretch.from}>
            <path d={area(stretch)} fill="url(#p-decay)" />
            <path d={line(stretch.points)} fill="none" style={{ stroke: 'var(--tide)' }} strokeWidth="1.5" />
          </g>
        ),
      )}
      <path d={`M0 ${limitY}H${width}`} style={{ stroke: 'var(--ink)' }} strokeWidth="1.25" />
      {labels && <DayLabels x={x} y={y} limitY={limitY} />}
    </svg>
  )
}

type Scales = { x: (hour: number) => number; y: (level: number) => number; limitY: number }

/** Words at the things themselves, so that no legend is needed. */
function DayLabels({ x, y, limitY }: Scales) {
  const words = (hour: number, height: number, text: string, anchor: 'start' | 'end' = 'start') => (
    <text x={x(hour)} y={height} textAnchor={anchor} style={{ fill: 'var(--ink-2)' }} fontSize="15">
      {text}
    </text>
  )
  return (
    <g>
      {words(FIRST_HOUR, limitY - 9, 'the limit')}
      {words(9.35, y(0.36), 'people come in', 'end')}
      {words(15.62, y(0.8), 'everyone leaves, and the level ebbs')}
      {words(18.45, y(0.3), 'as fast as outdoor air arrives', 'end')}
    </g>
  )
}

/** The left of the sign-in page: mark, the idea in a sentence, and a day's level drawn to the page's edge. */
export function SignInPicture() {
  return (
    <div className="flex min-w-0 flex-col pt-10 max-md:pt-5">
      <p className="flex items-center gap-[9px] px-10 text-[18px] font-[650] tracking-[-.01em] max-md:px-5">
        <Mark /> Ebbmark
      </p>
      <p className="mt-[12vh] max-w-[17em] px-10 text-[44px] leading-[1.12] font-[380] tracking-[-.015em] max-lg:text-[36px] max-md:hidden">
        Everyone who leaves a room shows how well it is aired.
      </p>
      <p className="mt-5 max-w-[31em] px-10 text-4 text-ink-2 max-md:hidden">
        Ebbmark reads the sensors that are already there, finds each ebb, and says how much outdoor air every
        room gets, with an honest uncertainty.
      </p>
      <p className="sr-only">
        Drawing: a level that rises while people are in a room and ebbs when they leave.
      </p>
      <div className="mt-auto pt-8 max-md:hidden">
        <DayDrawing size={{ width: 960, height: 430, left: 40 }} id="day-wide" labels />
      </div>
      <div className="pt-4 md:hidden">
        <DayDrawing size={{ width: 390, height: 110, left: 20 }} id="day-narrow" labels={false} />
      </div>
    </div>
  )
}
