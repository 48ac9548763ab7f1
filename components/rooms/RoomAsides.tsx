'use client'

import Link from 'next/link'
import { useBoard } from '@/components/live/use-board'
import { MarginSection } from '@/components/ui/Page'
import { dayAndClock, longDate } from '@/lib/format/clock'
import { spaced } from '@/lib/format/counts'
import { paths } from '@/lib/paths'
import type { Board } from '@/lib/wire/live-board'
import type { RoomFinding, RoomSensor } from '@/lib/wire/rooms'

/** Sensors of the room with reading and standing; the lead one shows the room's live number. */
export function RoomSensors({
  board: initial,
  roomId,
  sensors,
  nowS,
  timeZone,
  linked,
}: {
  board: Board
  roomId: string
  sensors: readonly RoomSensor[]
  nowS: number
  timeZone: string
  linked: boolean
}) {
  const { board } = useBoard(initial)
  const live = board.rooms.find(({ id }) => id === roomId)?.live
  const ppmOf = (sensor: RoomSensor) => (sensor.lead && live ? live.co2Ppm : sensor.co2Ppm)
  return (
    <MarginSection title={sensors.length === 1 ? 'Sensor' : 'Sensors'} className="max-lg:mt-9">
      {sensors.length === 0 && <p className="text-2 text-ink-2">No sensor is placed here yet.</p>}
      <ul>
        {sensors.map((sensor) => (
          <li
            key={sensor.deviceId}
            className="flex justify-between gap-4 border-t border-rule py-[7px] text-[15px] leading-5 first:border-t-0"
          >
            <span className="min-w-0">
              {sensor.label}
              <br />
              <span className="text-2 text-ink-3">
                {sensor.position}
                {sensor.lead ? ', lead' : ''} ·{' '}
                {linked ? (
                  <Link className="fig" href={paths.sensor(sensor.deviceId)}>
                    {sensor.deviceId}
                  </Link>
                ) : (
                  <span className="fig">{sensor.deviceId}</span>
                )}
              </span>
              {sensor.standingWords && (
                <span className="block text-2 text-ink-2">{sensor.standingWords}</span>
              )}
            </span>
            <span className="flex-none text-right">
              <Ppm value={ppmOf(sensor)} />
              <span className="block text-2 text-ink-2">{sensor.standing}</span>
              {sensor.lastAtS !== null && sensor.standing !== 'sound' && (
                <span className="block text-1 text-ink-3">{dayAndClock(sensor.lastAtS, nowS, timeZone)}</span>
              )}
            </span>
          </li>
        ))}
      </ul>
    </MarginSection>
  )
}

function Ppm({ value }: { value: number | null }) {
  if (value === null) return <span className="fig text-[14px]">–</span>
  return (
    <>
      <span className="fig text-[14px]">{spaced(value)}</span>
      <span className="text-1 text-ink-3"> ppm</span>
    </>
  )
}

/** What the nightly analysis found beside the figures, in its own sentences. */
export function RoomFindings({ findings, year }: { findings: readonly RoomFinding[]; year: string }) {
  if (findings.length === 0) return null
  return (
    <MarginSection title="Found" className="max-lg:mt-9">
      <ul>
        {findings.map((finding) => (
          <li
            key={`${finding.kind} ${finding.firstNight}`}
            className="border-t border-rule py-2 text-2 leading-[1.42] first:border-t-0"
          >
            <b>{finding.kind}.</b> {finding.sentence}{' '}
            <span className="text-ink-3">
              Since {longDate(finding.firstNight, year)}
              {finding.nights > 1 && `, ${finding.nights} nights`}.
            </span>
          </li>
        ))}
      </ul>
    </MarginSection>
  )
}

/** What a reader must not conclude from these figures. */
export function RoomCautions() {
  return (
    <p className="mt-12 max-w-measure border-t border-rule pt-3 text-2 text-ink-3">
      Every figure here is an estimate from a sensor. A low CO2 level does not prove clean air: other
      pollutants and filtration are not seen. Do not occupy a room by this page alone; follow the local code
      and licensed practice. Ebbmark is not a gas alarm.
    </p>
  )
}
