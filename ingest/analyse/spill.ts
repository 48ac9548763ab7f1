/** Readings in any order, sorted out by time into temporary files, so that days can be read back one after another in bounded memory. */
import { appendFileSync, mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import path from 'node:path'
import type { Series } from '@/lib/air/types'

const BUCKET_S = 2 * 86_400
const RECORD_BYTES = 24
const BUFFER_RECORDS = 2000
/** buckets kept in memory while days are read in order */
const KEPT_BUCKETS = 3

type Bucket = { buffer: Float64Array; used: number; spilled: boolean }

/** A store of (series index, time, value) that lives in a directory of its own until `close`. */
export class Spill {
  private readonly directory = mkdtempSync(path.join(tmpdir(), 'ebbmark-analyse-'))
  private readonly buckets = new Map<number, Bucket>()
  private readonly loaded = new Map<number, Map<number, Series>>()
  firstS = Number.POSITIVE_INFINITY
  lastS = Number.NEGATIVE_INFINITY

  add(index: number, timeS: number, value: number): void {
    const key = Math.floor(timeS / BUCKET_S)
    let bucket = this.buckets.get(key)
    if (!bucket) {
      bucket = { buffer: new Float64Array(BUFFER_RECORDS * 3), used: 0, spilled: false }
      this.buckets.set(key, bucket)
    }
    bucket.buffer[bucket.used] = index
    bucket.buffer[bucket.used + 1] = timeS
    bucket.buffer[bucket.used + 2] = value
    bucket.used += 3
    if (timeS < this.firstS) this.firstS = timeS
    if (timeS > this.lastS) this.lastS = timeS
    if (bucket.used === bucket.buffer.length) this.flush(key, bucket)
  }

  private file(key: number): string {
    return path.join(this.directory, `${key}.bin`)
  }

  private flush(key: number, bucket: Bucket): void {
    appendFileSync(this.file(key), new Uint8Array(bucket.buffer.buffer, 0, bucket.used * 8))
    bucket.used = 0
    bucket.spilled = true
  }

  /** True when some reading lies between two instants, to the width of a bucket. */
  mayHold(fromS: number, toS: number): boolean {
    for (let key = Math.floor(fromS / BUCKET_S); key <= Math.floor(toS / BUCKET_S); key++) {
      if (this.buckets.has(key)) return true
    }
    return false
  }

  private load(key: number): Map<number, Series> {
    const known = this.loaded.get(key)
    if (known) return known
    const bucket = this.buckets.get(key)
    const groups = new Map<number, { timeS: number[]; co2Ppm: number[] }>()
    const take = (records: Float64Array, count: number) => {
      for (let i = 0; i < count; i += 3) {
        let group = groups.get(records[i]!)
        if (!group) {
          group = { timeS: [], co2Ppm: [] }
          groups.set(records[i]!, group)
        }
        group.timeS.push(records[i + 1]!)
        group.co2Ppm.push(records[i + 2]!)
      }
    }
    if (bucket?.spilled) {
      const bytes = readFileSync(this.file(key))
      const copy = bytes.buffer.slice(
        bytes.byteOffset,
        bytes.byteOffset + bytes.length - (bytes.length % RECORD_BYTES),
      )
      take(new Float64Array(copy), copy.byteLength / 8)
    }
    if (bucket) take(bucket.buffer, bucket.used)
    const sorted = new Map([...groups].map(([index, group]) => [index, inTimeOrder(group)]))
    this.loaded.set(key, sorted)
    if (this.loaded.size > KEPT_BUCKETS) this.loaded.delete(this.loaded.keys().next().value!)
    return sorted
  }

  /** The readings of one series between two instants, in time order, doubles kept. */
  read(index: number, fromS: number, toS: number): Series {
    const parts: Series[] = []
    for (let key = Math.floor(fromS / BUCKET_S); key <= Math.floor(toS / BUCKET_S); key++) {
      if (!this.buckets.has(key)) continue
      const series = this.load(key).get(index)
      if (series) parts.push(between(series, fromS, toS))
    }
    if (parts.length === 1) return parts[0]!
    const length = parts.reduce((sum, part) => sum + part.timeS.length, 0)
    const joined = { timeS: new Float64Array(length), co2Ppm: new Float64Array(length) }
    let at = 0
    for (const part of parts) {
      joined.timeS.set(part.timeS, at)
      joined.co2Ppm.set(part.co2Ppm, at)
      at += part.timeS.length
    }
    return joined
  }

  /** Removes the temporary files. */
  close(): void {
    rmSync(this.directory, { recursive: true, force: true })
  }
}

function inTimeOrder(group: { timeS: number[]; co2Ppm: number[] }): Series {
  let rising = true
  for (let i = 1; rising && i < group.timeS.length; i++) rising = group.timeS[i]! >= group.timeS[i - 1]!
  if (rising) return { timeS: Float64Array.from(group.timeS), co2Ppm: Float64Array.from(group.co2Ppm) }
  const order = Array.from(group.timeS.keys()).sort((a, b) => group.timeS[a]! - group.timeS[b]!)
  return {
    timeS: Float64Array.from(order, (i) => group.timeS[i]!),
    co2Ppm: Float64Array.from(order, (i) => group.co2Ppm[i]!),
  }
}

function between(series: Series, fromS: number, toS: number): Series {
  let low = 0
  let high = series.timeS.length
  while (low < high && series.timeS[low]! < fromS) low++
  while (high > low && series.timeS[high - 1]! > toS) high--
  return { timeS: series.timeS.subarray(low, high), co2Ppm: series.co2Ppm.subarray(low, high) }
}
