import type { ReactNode } from 'react'
import { localDate } from '@/lib/time'
import type { Board } from '@/lib/wire/live-board'
import type { RoomDetail } from '@/lib/wire/rooms'
import { RateHistory } from './RateHistory'
import { RoomCautions, RoomFindings, RoomSensors } from './RoomAsides'
import { RoomHead } from './RoomHead'
import { RoomTakes } from './RoomTakes'
import { RoomVerdict } from './RoomVerdict'

type Props = {
  board: Board
  detail: RoomDetail
  timeZone: string
  nowS: number
  /** the reader reads air-change figures */
  rates: boolean
  decaysHref: string | null
  linksSensors: boolean
  /** tide line and chart, which may still be on their way */
  children: ReactNode
}

/** A room's page: number and verdict first, then a day, a week, half a year; the margin comes up under the verdict on a narrow screen. */
export function RoomView({
  board,
  detail,
  timeZone,
  nowS,
  rates,
  decaysHref,
  linksSensors,
  children,
}: Props) {
  const { room, verdict } = detail
  const tile = board.rooms.find(({ id }) => id === room.id)
  const shown = tile && !tile.hidden
  const basisRate = verdict?.basisFlowLps ? (verdict.basisFlowLps * 3.6) / verdict.volumeM3 : null
  return (
    <>
      <div className="grid grid-cols-[minmax(0,1fr)_304px] gap-x-16 max-lg:flex max-lg:flex-col">
        <div className="min-w-0 max-lg:contents">
          <RoomHead board={board} room={room}>
            <RoomVerdict detail={detail} rates={rates} decaysHref={decaysHref} />
          </RoomHead>
          {shown && children}
          {rates && (
            <RateHistory
              weeks={detail.weeks}
              changes={detail.changes}
              basisRatePerHour={basisRate}
              timeZone={timeZone}
              roomName={room.name}
            />
          )}
        </div>
        <aside className="pt-[18px] max-lg:contents">
          <RoomTakes detail={detail} tile={tile} rates={rates} />
          {shown && (
            <RoomSensors
              board={board}
              roomId={room.id}
              sensors={detail.sensors}
              nowS={nowS}
              timeZone={timeZone}
              linked={linksSensors}
            />
          )}
          <RoomFindings findings={detail.findings} year={localDate(nowS, timeZone).slice(0, 4)} />
        </aside>
      </div>
      <RoomCautions />
    </>
  )
}
