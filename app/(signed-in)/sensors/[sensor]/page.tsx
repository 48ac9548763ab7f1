import { formatInTimeZone } from 'date-fns-tz'
import type { Metadata } from 'next'
import Link from 'next/link'
import { notFound } from 'next/navigation'
import { RefusedTable } from '@/components/sensors/RefusedTable'
import { RenewSecret, RetireSensor } from '@/components/sensors/SensorActions'
import { Crumbs, MarginSection, Page, PageHead, WithMargin } from '@/components/ui/Page'
import { Pairs } from '@/components/ui/Table'
import { getSensor, getSite, listRefusals } from '@/db/queries/sensors'
import { spanWords } from '@/lib/format/spans'
import { paths } from '@/lib/paths'
import { can } from '@/lib/policy/permissions'
import { systemClock } from '@/lib/server/clock'
import { requirePage } from '@/lib/server/http/page'
import { topicOf } from '@/lib/wire/topics'
import { renewSecretAction, retireSensorAction } from '../actions'

export const metadata: Metadata = { title: 'Sensor' }

/** One sensor: where it hangs, how it stands, what was refused, and its secret renewed or its work ended. */
export default async function SensorPage({ params }: { params: Promise<{ sensor: string }> }) {
  const page = await requirePage('sensor.read')
  const deviceId = decodeURIComponent((await params).sensor)
  const now = systemClock.now()
  const { building } = page
  const found = await page.read(async (tx) => {
    const sensor = await getSensor(tx, { deviceId, now })
    return (
      sensor && {
        sensor,
        refusals: await listRefusals(tx, { deviceId }),
        site: building ? await getSite(tx, { buildingId: building.id }) : undefined,
      }
    )
  })
  if (!found) notFound()
  const { sensor, refusals, site } = found
  const mayChange = can(page.membership.roles, 'sensor.register') && sensor.standing !== 'retired'
  const zone = building?.timeZone ?? 'UTC'
  return (
    <Page>
      <Crumbs crumbs={[{ word: 'Sensors', href: paths.sensors() }, { word: sensor.deviceId }]} />
      <PageHead
        title={`${sensor.room ? `${sensor.room.name}, ` : ''}${sensor.label}`}
        lead={`${sensor.deviceId} is ${sensor.standing}. ${sensor.standingWords ?? ''}`}
      />
      <WithMargin
        margin={
          mayChange && (
            <>
              <MarginSection title="Secret lost?">
                <RenewSecret deviceId={sensor.deviceId} renew={renewSecretAction} />
              </MarginSection>
              <MarginSection title="Taken down?">
                <RetireSensor deviceId={sensor.deviceId} retire={retireSensorAction} />
              </MarginSection>
            </>
          )
        }
      >
        <Pairs
          rows={[
            {
              key: 'room',
              name: 'Room',
              value: sensor.room ? (
                <Link href={paths.room(sensor.room.id)}>{`${sensor.room.number} ${sensor.room.name}`}</Link>
              ) : (
                'outdoors'
              ),
            },
            { key: 'air', name: 'Air it reads', value: sensor.position ?? 'not placed' },
            { key: 'lead', name: 'Leads its room', value: sensor.lead ? 'yes' : 'no' },
            { key: 'co2', name: 'CO2, ppm', value: sensor.co2Ppm === null ? '–' : Math.round(sensor.co2Ppm) },
            {
              key: 'last',
              name: 'Last heard',
              value:
                sensor.lastAtS === null
                  ? 'never'
                  : `${formatInTimeZone(sensor.lastAtS * 1000, zone, 'd MMM HH:mm:ss zzz')}, ${spanWords(now.getTime() / 1000 - sensor.lastAtS)} ago`,
            },
            { key: 'interval', name: 'Should speak every', value: spanWords(sensor.intervalS) },
            {
              key: 'registered',
              name: 'Registered',
              value: formatInTimeZone(sensor.registeredS * 1000, zone, 'd MMM yyyy HH:mm'),
            },
            {
              key: 'topic',
              name: 'Topic',
              value: (
                <span className="fig text-[13px] break-all">
                  {topicOf(site ?? '', sensor.deviceId, 'readings')}
                </span>
              ),
            },
          ]}
        />
        <RefusedTable refusals={refusals} timeZone={zone} />
      </WithMargin>
    </Page>
  )
}
