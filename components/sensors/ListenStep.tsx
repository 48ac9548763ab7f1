'use client'

import { useQuery } from '@tanstack/react-query'
import { useEffect, useState } from 'react'
import { LevelGlass } from '@/components/ui/LevelGlass'
import { clockWords } from '@/lib/format/spans'
import { paths } from '@/lib/paths'
import { type FirstReading, firstReadingSchema } from '@/lib/wire/sensors'
import { CopyField } from './CopyField'
import type { RegisteredSensor } from './RegisterSensor'

async function askFirstReading(deviceId: string): Promise<FirstReading> {
  const response = await fetch(paths.api.firstReading(deviceId), { cache: 'no-store' })
  if (!response.ok) throw new Error(`The server answered ${response.status}.`)
  return firstReadingSchema.parse(await response.json())
}

/** The secret, once, and the wait beside the sensor until it is heard. */
export function ListenStep({ sensor, intervalS }: { sensor: RegisteredSensor; intervalS: number }) {
  const seconds = useSecondsSinceShown()
  const { data, isError } = useQuery({
    queryKey: ['first-reading', sensor.deviceId],
    queryFn: () => askFirstReading(sensor.deviceId),
    refetchInterval: (query) => (query.state.data?.heard ? 10_000 : 2000),
  })
  const late = !data?.heard && seconds > intervalS * 2 + 60
  return (
    <div>
      <p className="mb-2 text-2">
        <b>Its secret is shown this once.</b> Type it into the sensor, or copy it now; a lost one is renewed
        on the sensor’s page.
      </p>
      <CopyField label="Secret (MQTT password)" value={sensor.secret} />
      <CopyField label="User name and client id" value={sensor.deviceId} />
      <CopyField label="Broker" value={`${sensor.broker.host}:${sensor.broker.port}`} />
      <CopyField label="Topic, QoS 1" value={sensor.topic} />
      <div className="mt-6 grid grid-cols-[44px_minmax(0,1fr)] items-end gap-6">
        <LevelGlass
          level={data?.co2Ppm ? Math.max(0, (data.co2Ppm - 430) / 800) : null}
          state={data?.heard ? 'in range' : 'no signal'}
          widthPx={44}
          heightPx={110}
          lipPx={8}
        />
        <div aria-live="polite">
          <p className="text-[40px] leading-none font-[540] tabular-nums">
            {data?.heard && data.co2Ppm !== null ? (
              <>
                {Math.round(data.co2Ppm)} <small className="text-2 font-normal text-ink-3">ppm</small>
              </>
            ) : (
              clockWords(seconds)
            )}
          </p>
          <p className="mt-1 text-2 text-ink-2">
            {data?.heard
              ? 'first reading heard'
              : `since it was registered. It should speak within ${clockWords(intervalS * 2)}.`}
          </p>
        </div>
      </div>
      <dl className="mt-4 border-t border-ink text-[15px]">
        <Line name="Heard by the broker" value={data?.heard ? 'yes' : 'waiting'} />
        <Line
          name="Temperature"
          value={data?.tempC == null ? 'after the first' : `${data.tempC.toFixed(1)} °C`}
        />
        <Line name="Clock" value={clockLine(data)} />
        <Line
          name="Signal"
          value={data?.rssiDbm == null ? 'not sent' : `${String(data.rssiDbm).replace('-', '−')} dBm`}
        />
      </dl>
      {data?.refused && (
        <p role="alert" className="mt-3 border-l-0 text-2 text-silt-ink">
          {data.refused.count === 1 ? 'A message was' : `${data.refused.count} messages were`} refused:{' '}
          {data.refused.detail}
        </p>
      )}
      {late && !data?.refused && (
        <p className="mt-3 text-2">
          Nothing arrived yet. Check that it has power and network, that broker and port are right, and that
          user name and client id both are <span className="fig">{sensor.deviceId}</span>. You can leave; the
          sensor stays registered and is shown as awaiting its first reading.
        </p>
      )}
      {isError && (
        <p className="mt-3 text-2 text-ink-2">
          No signal here to ask whether it was heard; asking again by itself.
        </p>
      )}
    </div>
  )
}

function Line({ name, value }: { name: string; value: string }) {
  return (
    <div className="flex justify-between gap-3 border-b border-rule py-[10px]">
      <dt>{name}</dt>
      <dd className="text-ink-2">{value}</dd>
    </div>
  )
}

/** How far the sensor's own time is from the server's. */
function clockLine(data: FirstReading | undefined): string {
  if (data?.atS == null || data.receivedS === null) return 'after the first'
  const off = Math.abs(data.receivedS - data.atS)
  return off < 5
    ? `right to ${Math.max(1, Math.ceil(off))} s`
    : `${Math.round(off)} s ${data.atS < data.receivedS ? 'behind' : 'ahead'}`
}

function useSecondsSinceShown(): number {
  const [seconds, setSeconds] = useState(0)
  useEffect(() => {
    const from = Date.now()
    const timer = setInterval(() => setSeconds((Date.now() - from) / 1000), 1000)
    return () => clearInterval(timer)
  }, [])
  return seconds
}
