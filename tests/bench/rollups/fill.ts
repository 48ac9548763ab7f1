import type pg from 'pg'
import type { Database } from '@/db/client'
import { type MeasuredBuilding, makeMeasuredBuilding } from '@/tests/support/measured-building'

const WEEK_S = 7 * 86_400

type Fill = { database: Database; owner: pg.Client; rooms: number; fromS: number; toS: number }

/** A year as it would have come in: in order of time, all sensors of a minute together, with every quantity that a sensor sends. */
export async function fillRecord({ database, owner, rooms, fromS, toS }: Fill): Promise<MeasuredBuilding> {
  const building = await makeMeasuredBuilding(database, {
    slug: 'bench',
    timeZone: 'Europe/Lisbon',
    rooms: Array.from({ length: rooms }, (_, index) => ({
      ...{ number: `r${index}`, name: `Room ${index}`, volumeM3: 75, rateOnPerHour: 3, rateOffPerHour: 0.4 },
      designHeadcount: 10,
    })),
  })
  await owner.query(
    `SELECT ensure_readings_month(m) FROM generate_series(date_trunc('month', to_timestamp($1), 'UTC'), to_timestamp($2), interval '1 month') m`,
    [fromS, toS],
  )
  const ids = building.rooms.map((room) => room.sensorId)
  for (let weekS = fromS; weekS < toS; weekS += WEEK_S)
    await fillWeek(owner, ids, weekS, Math.min(toS, weekS + WEEK_S))
  return building
}

function fillWeek(owner: pg.Client, sensorIds: readonly number[], fromS: number, toS: number) {
  return owner.query(
    `INSERT INTO readings (at, received_at, sensor_id, co2_ppm, temp_c, rh_pct, battery_pct, rssi_dbm)
     SELECT to_timestamp(t), to_timestamp(t + 0.8), s, (430 + 500 * greatest(0, sin(t * 2 * pi() / 86400 + s)) + 9 * random())::int, round((21 + random())::numeric, 1),
       (35 + 20 * random())::int, 91, -60 - (10 * random())::int
     FROM generate_series($1::bigint, $2::bigint, 60) AS t, unnest($3::int[]) AS s ON CONFLICT DO NOTHING`,
    [fromS, toS - 60, sensorIds],
  )
}
