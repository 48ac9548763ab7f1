import { Caution, MarginSection } from '@/components/ui/Page'
import { Pairs } from '@/components/ui/Table'
import { OCCUPANCY_CAUTION } from '@/lib/air/supports'
import { spaced } from '@/lib/format/counts'
import { clearMinutes, rateText } from '@/lib/format/verdict'
import type { RoomTile } from '@/lib/wire/live-board'
import type { RoomDetail } from '@/lib/wire/rooms'

/** To what share of the way from outdoor air to the limit a room is cleared before people come. */
const CLEARED_SHARE = 0.25

type Row = { key: string; name: string; value: React.ReactNode }

function rowsOf({ room, verdict }: RoomDetail, tile: RoomTile | undefined): Row[] {
  const people = (count: number) => <b>{count === 1 ? '1 person' : `${count} people`}</b>
  const rows: Row[] = []
  if (verdict && verdict.supportsPersons !== null) {
    rows.push({ key: 'supports', name: 'Its ventilation supports', value: people(verdict.supportsPersons) })
  }
  if (room.designHeadcount !== null) {
    rows.push({ key: 'design', name: 'It is meant for', value: people(room.designHeadcount) })
  }
  if (room.permittedOccupancy !== null) {
    rows.push({ key: 'permitted', name: 'Permitted, as entered', value: people(room.permittedOccupancy) })
  }
  const cleared = tile && tile.outdoorPpm + CLEARED_SHARE * (tile.limitPpm - tile.outdoorPpm)
  const slowest = verdict?.rateLow ?? null
  const minutes =
    tile && cleared && slowest ? clearMinutes(tile.limitPpm, cleared, tile.outdoorPpm, slowest) : null
  if (tile && cleared && minutes !== null) {
    const name = `Empty, from ${spaced(tile.limitPpm)} to ${spaced(cleared)} ppm`
    rows.push({ key: 'clear', name, value: <b>{Math.ceil(minutes)} min</b> })
  }
  return rows
}

/** How many people the room's ventilation supports and how long it takes to clear; never without the caution. */
export function RoomTakes({
  detail,
  tile,
  rates,
}: {
  detail: RoomDetail
  tile: RoomTile | undefined
  rates: boolean
}) {
  const { verdict } = detail
  const rows = rowsOf(detail, tile)
  const low = verdict?.rateLow ?? null
  return (
    <MarginSection title="What the room can take" className="max-lg:-order-1 max-lg:mb-8">
      {rows.length > 0 && <Pairs rows={rows} />}
      {verdict?.supportsPersons === null && (
        <p className="border-t border-rule pt-2 text-2 text-ink-2">
          How many people its ventilation supports is not known:{' '}
          {missingWords(verdict.isDilutionRate, verdict.basisName)}.
        </p>
      )}
      <Caution>
        {OCCUPANCY_CAUTION}
        {rates &&
          low !== null &&
          ` At the lower end of the rate, ${rateText(low)} per hour; one sensor’s estimate.`}
      </Caution>
    </MarginSection>
  )
}

function missingWords(isDilutionRate: boolean, basisName: string | null): string {
  if (basisName === null) return 'no basis is set'
  return isDilutionRate
    ? 'how much of its air is outdoor air is not known'
    : 'its outdoor flow is not known well enough'
}
