import { afterAll, beforeAll, expect, it } from 'vitest'
import * as schema from '@/db/schema'
import { watchSensors } from '@/ingest/nightly/watch/silent'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { type MeasuredBuilding, makeMeasuredBuilding } from '@/tests/support/measured-building'

let test: TestDatabase
let building: MeasuredBuilding

beforeAll(async () => {
  test = await createTestDatabase()
  building = await makeMeasuredBuilding(test.database, { slug: 'watch', timeZone: 'Europe/Berlin' })
})
afterAll(() => test.drop())

const heard = (index: number, at: string) =>
  test.database.asSystem('test', (tx) => {
    const values = {
      sensorId: building.rooms[index]!.sensorId,
      at: new Date(at),
      receivedAt: new Date(at),
      co2Ppm: 500,
    }
    return tx
      .insert(schema.latestReadings)
      .values(values)
      .onConflictDoUpdate({ target: schema.latestReadings.sensorId, set: values })
  })

const watchAt = async (now: string) => {
  await watchSensors({
    database: test.database,
    buildingId: building.buildingId,
    clock: { now: () => new Date(now) },
  })
  return test.database.asSystem('test', (tx) =>
    tx.select().from(schema.findings).orderBy(schema.findings.subjectKey),
  )
}

it('finds sensors silent by their own interval, and no longer once they speak', async () => {
  await heard(0, '2026-03-02T10:00:00Z')
  await heard(1, '2026-03-02T11:30:00Z')
  // the third has never spoken: it awaits its first reading and is not silent
  expect(await watchAt('2026-03-02T10:59:00Z')).toEqual([])
  const [first, ...others] = await watchAt('2026-03-02T12:00:00Z')
  expect(others).toEqual([])
  expect(first).toMatchObject({
    kind: 'sensor silent',
    roomId: building.rooms[0]!.id,
    ...{ firstNight: '2026-03-02', lastNight: '2026-03-02', nights: 1 },
    sentence: 'The sensor Alder, wall has sent nothing since 11:00 on 2026-03-02.',
  })
  // asked again nothing changes; the days count on under the same address
  expect(await watchAt('2026-03-02T12:10:00Z')).toEqual([first])
  const later = (await watchAt('2026-03-04T12:00:00Z')).find(
    (finding) => finding.roomId === building.rooms[0]!.id,
  )
  expect(later).toMatchObject({
    publicId: first!.publicId,
    createdAt: first!.createdAt,
    nights: 3,
    lastNight: '2026-03-04',
  })
  await heard(0, '2026-03-04T12:05:00Z')
  await heard(1, '2026-03-04T12:05:00Z')
  expect(await watchAt('2026-03-04T12:10:00Z')).toEqual([])
})

it('waits for sensors that report rarely', async () => {
  await test.database.asSystem('test', (tx) => tx.update(schema.sensors).set({ intervalS: 7200 }))
  // five intervals of two hours
  expect(await watchAt('2026-03-04T22:04:00Z')).toEqual([])
  expect(await watchAt('2026-03-04T22:06:00Z')).toHaveLength(2)
})
