import type pg from 'pg'
import { to as copyTo } from 'pg-copy-streams'
import type { Series } from '@/lib/air/types'

/** Seconds between the epochs of PostgreSQL (2000-01-01) and of Unix. */
const POSTGRES_EPOCH_S = 946_684_800
/** Signature, flags and length of extension: what stands before the first row of a binary COPY. */
const HEADER_BYTES = 19
/** Two bytes of field count, then sensor (int4), instant (int8, microseconds) and CO2 (float4), each behind its length. */
const ROW_BYTES = 2 + (4 + 4) + (4 + 8) + (4 + 4)

/** Readings of one sensor while they arrive: arrays that grow. */
class Record {
  timeS = new Float64Array(4096)
  co2Ppm = new Float64Array(4096)
  length = 0
  sorted = true

  add(timeS: number, co2Ppm: number): void {
    if (this.length === this.timeS.length) this.grow()
    if (this.length > 0 && timeS < this.timeS[this.length - 1]!) this.sorted = false
    this.timeS[this.length] = timeS
    this.co2Ppm[this.length] = co2Ppm
    this.length++
  }

  private grow(): void {
    for (const name of ['timeS', 'co2Ppm'] as const) {
      const larger = new Float64Array(this.length * 2)
      larger.set(this[name])
      this[name] = larger
    }
  }

  series(): Series {
    const timeS = this.timeS.slice(0, this.length)
    const co2Ppm = this.co2Ppm.slice(0, this.length)
    if (this.sorted) return { timeS, co2Ppm }
    const order = Array.from(timeS.keys()).sort((a, b) => timeS[a]! - timeS[b]!)
    return { timeS: timeS.map((_, i) => timeS[order[i]!]!), co2Ppm: co2Ppm.map((_, i) => co2Ppm[order[i]!]!) }
  }
}

/** Takes whole rows from the front of `bytes`; returns what is left over for the next chunk. */
function takeRows(bytes: Buffer, records: Map<number, Record>): Buffer {
  let at = 0
  while (at + 2 <= bytes.length && bytes.readInt16BE(at) !== -1 && at + ROW_BYTES <= bytes.length) {
    const sensorId = bytes.readInt32BE(at + 6)
    const micros = bytes.readInt32BE(at + 14) * 4_294_967_296 + bytes.readUInt32BE(at + 18)
    const record = records.get(sensorId)
    record?.add(micros / 1e6 + POSTGRES_EPOCH_S, bytes.readFloatBE(at + 26))
    at += ROW_BYTES
  }
  return bytes.subarray(at)
}

/**
 * The raw record of several sensors from `fromS` (included) to `toS` (excluded), epoch seconds, rising; a sensor without readings has an
 * empty one. By binary COPY into typed arrays, because a building's weeks are millions of rows.
 * @throws RangeError when an id or an instant is no finite number
 */
export async function readSeries(
  client: pg.ClientBase,
  { sensorIds, fromS, toS }: { sensorIds: readonly number[]; fromS: number; toS: number },
): Promise<Map<number, Series>> {
  // COPY takes no parameters, so what goes into its text is proven to be numbers first
  if (!sensorIds.every(Number.isInteger) || !Number.isFinite(fromS) || !Number.isFinite(toS)) {
    throw new RangeError(`not usable to read by: sensors ${sensorIds}, from ${fromS} to ${toS}`)
  }
  const records = new Map(sensorIds.map((id) => [id, new Record()]))
  if (sensorIds.length > 0 && toS > fromS) {
    const stream = (client as pg.PoolClient).query(
      copyTo(`COPY (SELECT sensor_id, at, co2_ppm FROM readings WHERE sensor_id IN (${sensorIds.join(',')})
        AND at >= to_timestamp(${fromS}) AND at < to_timestamp(${toS})) TO STDOUT WITH (FORMAT binary)`),
    )
    let rest: Buffer = Buffer.alloc(0)
    let headed = false
    for await (const chunk of stream) {
      rest = rest.length > 0 ? Buffer.concat([rest, chunk as Buffer]) : (chunk as Buffer)
      if (!headed) {
        if (rest.length < HEADER_BYTES) continue
        rest = rest.subarray(HEADER_BYTES)
        headed = true
      }
      rest = takeRows(rest, records)
    }
  }
  return new Map(sensorIds.map((id) => [id, records.get(id)!.series()]))
}

/** The part of a series from `fromS` (included) to `toS` (excluded), without a copy. */
export function sliceSeries(series: Series, fromS: number, toS: number): Series {
  const from = firstAtOrAfter(series.timeS, fromS)
  const to = firstAtOrAfter(series.timeS, toS)
  return { timeS: series.timeS.subarray(from, to), co2Ppm: series.co2Ppm.subarray(from, to) }
}

function firstAtOrAfter(timeS: Float64Array, wanted: number): number {
  let low = 0
  let high = timeS.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (timeS[middle]! < wanted) low = middle + 1
    else high = middle
  }
  return low
}
