import type { Metadata } from 'next'
import { RegisterSensor } from '@/components/sensors/RegisterSensor'
import { Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { listPlaces } from '@/db/queries/sensors'
import { requirePage } from '@/lib/server/http/page'
import { registerSensorAction } from '../actions'

export const metadata: Metadata = { title: 'Register a sensor' }

/** One sensor at a time: identify, place, listen. */
export default async function RegisterSensorPage() {
  const page = await requirePage('sensor.register')
  const { building } = page
  if (!building) {
    return (
      <Page>
        <EmptyState title="No building yet">
          Nobody has given you a building to work on. Ask your administrator to add you to one.
        </EmptyState>
      </Page>
    )
  }
  const places = await page.read((tx) => listPlaces(tx, { buildingId: building.id }))
  return (
    <Page>
      <PageHead
        title="Register a sensor"
        lead={`In ${building.name}. You need its device id, its room, and two minutes beside it.`}
      />
      <RegisterSensor building={building.slug} places={places} register={registerSensorAction} />
    </Page>
  )
}
