import type { Metadata } from 'next'
import { type SensorGroup, SensorTable } from '@/components/sensors/SensorTable'
import { ButtonLink } from '@/components/ui/Button'
import { Filters } from '@/components/ui/Filters'
import { Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { listSensors } from '@/db/queries/sensors'
import { counted, sentenceCase } from '@/lib/format/counts'
import { withQuery } from '@/lib/format/query'
import { paths } from '@/lib/paths'
import { can } from '@/lib/policy/permissions'
import { systemClock } from '@/lib/server/clock'
import { requirePage } from '@/lib/server/http/page'
import { type SensorRow, STANDINGS, sensorListQuerySchema } from '@/lib/wire/sensors'

export const metadata: Metadata = { title: 'Sensors' }

/** Every sensor of the building with its standing. */
export default async function SensorsPage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>
}) {
  const page = await requirePage('sensor.read')
  const asked = sensorListQuerySchema.safeParse(await searchParams)
  const standing = asked.success ? asked.data.standing : 'all'
  const now = systemClock.now()
  const { building } = page
  const rows = building ? await page.read((tx) => listSensors(tx, { buildingId: building.id, now })) : []
  const shown = rows.filter((row) => standing === 'all' || row.standing === standing)
  const mayRegister = can(page.membership.roles, 'sensor.register')
  const choices = (['all', ...STANDINGS] as const).map((each) => ({
    word: each,
    href: withQuery(paths.sensors(), {}, { standing: each === 'all' ? undefined : each }),
    current: standing === each,
    count: each === 'all' ? rows.length : rows.filter((row) => row.standing === each).length,
  }))
  return (
    <Page>
      <PageHead
        title={headline(rows)}
        lead={
          building
            ? `Standing is judged from readings, by each sensor’s own interval. Times are those of ${building.timeZone}.`
            : undefined
        }
        end={
          mayRegister && (
            <ButtonLink href={paths.registerSensor()} look="main">
              Register a sensor
            </ButtonLink>
          )
        }
      />
      <Filters groups={[{ label: 'Standing', choices }]} />
      {shown.length > 0 ? (
        <SensorTable groups={byFloor(shown)} nowS={now.getTime() / 1000} />
      ) : (
        <EmptyState
          level={2}
          title={rows.length === 0 ? 'No sensor is registered here yet' : 'No sensor has this standing'}
        >
          {rows.length === 0
            ? 'Register the first one: you need its device id, its room, and two minutes beside it.'
            : 'Choose “all” to see every sensor.'}
        </EmptyState>
      )}
    </Page>
  )
}

/** The finding: how many need someone. */
function headline(rows: readonly SensorRow[]): string {
  const trouble = rows.filter((row) => row.standing === 'silent' || row.standing === 'suspect').length
  if (rows.length === 0) return 'Sensors'
  if (trouble === 0) return `${sentenceCase(counted(rows.length, 'sensor'))}, none in trouble`
  return `${sentenceCase(counted(trouble, 'sensor'))} of ${rows.length} ${trouble === 1 ? 'needs' : 'need'} someone`
}

/** Floors from the top, then what hangs outside. */
function byFloor(rows: readonly SensorRow[]): SensorGroup[] {
  const groups = new Map<string, SensorRow[]>()
  for (const row of rows) {
    const floor = row.room?.floor ?? 'Outdoors'
    groups.set(floor, [...(groups.get(floor) ?? []), row])
  }
  return [...groups]
    .map(([key, own]) => ({ key, words: key, rows: own }))
    .sort((a, b) => (b.rows[0]?.room?.floorOrdinal ?? -99) - (a.rows[0]?.room?.floorOrdinal ?? -99))
}
