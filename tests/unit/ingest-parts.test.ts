import type { Client } from 'aedes'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { deviceSecretSha256, isDeviceSecret, newDeviceSecret } from '@/db/device-secret'
import type { Device } from '@/db/queries/devices'
import { FailedConnects } from '@/ingest/broker/failed-connects'
import { LIMITS } from '@/ingest/broker/limits'
import { Session } from '@/ingest/broker/session'
import { Throttle } from '@/ingest/broker/throttle'
import { faultOf } from '@/ingest/worker/faults'
import { retryDelayMs, within } from '@/ingest/worker/pause'
import { RefusalBook } from '@/ingest/worker/refusal-book'
import { takePublish } from '@/ingest/worker/take'

const nowMs = Date.UTC(2026, 2, 2, 7, 31)

describe('the throttle', () => {
  it('lets a burst pass, then the rate: what is owed is waited for', () => {
    const throttle = new Throttle({ ratePerS: 10, burst: 100 })
    expect(throttle.delayMs('a', 100, nowMs)).toBe(0)
    expect(throttle.delayMs('a', 1, nowMs)).toBe(100)
    expect(throttle.delayMs('a', 9, nowMs)).toBe(1000)
    expect(throttle.delayMs('b', 1, nowMs)).toBe(0)
    expect(throttle.delayMs('a', 1, nowMs + 10_000)).toBe(0)
  })
  it('passes in the long run no more than burst and rate allow', () => {
    const costs = fc.array(fc.integer({ min: 1, max: 500 }), { minLength: 1, maxLength: 200 })
    fc.assert(
      fc.property(costs, (list) => {
        const throttle = new Throttle({ ratePerS: 10, burst: 100 })
        const released = list.map(
          (cost, index) => nowMs + index * 20 + throttle.delayMs('a', cost, nowMs + index * 20),
        )
        const total = list.reduce((sum, cost) => sum + cost, 0)
        const earned = 100 + ((Math.max(...released) - nowMs) / 1000) * 10
        return total <= earned + 1e-6
      }),
    )
  })
  it('does not go back where the clock does', () => {
    const throttle = new Throttle({ ratePerS: 10, burst: 10 })
    throttle.delayMs('a', 10, nowMs)
    expect(throttle.delayMs('a', 1, nowMs - 3_600_000)).toBeCloseTo(100)
  })
})

describe('a session', () => {
  it('releases messages in the order of their arrival, whatever each must wait', async () => {
    let destroyed = 0
    const client = { conn: { destroy: () => destroyed++ } } as unknown as Client
    const session = new Session(client, {} as Device)
    const order: number[] = []
    await new Promise<void>((resolve) => {
      for (const [index, delayMs] of [0, 30, 5, 0, 12].entries())
        session.inTurn(delayMs, () => order.push(index) === 5 && resolve())
    })
    expect(order).toEqual([0, 1, 2, 3, 4])
    session.inTurn(5, () => order.push(99))
    session.close()
    await new Promise((resolve) => setTimeout(resolve, 20))
    expect([order.length, destroyed]).toEqual([5, 1])
  })
})

describe('failed connects', () => {
  it('lock their address and name for the rest of the minute', () => {
    const failed = new FailedConnects()
    for (let tries = 0; tries < LIMITS.failedConnectsPerMinute; tries++) {
      expect(failed.isLocked('10.0.0.1', 'R01', nowMs)).toBe(false)
      failed.add('10.0.0.1', tries % 2 ? 'R01' : 'r01', nowMs)
    }
    expect(failed.isLocked('10.0.0.1', 'r01', nowMs)).toBe(true)
    expect(failed.isLocked('10.0.0.1', 'r02', nowMs)).toBe(false)
    expect(failed.isLocked('10.0.0.2', 'r01', nowMs)).toBe(false)
    expect(failed.isLocked('10.0.0.1', 'r01', nowMs + 60_000)).toBe(false)
  })
})

describe('the refusal book', () => {
  const refusal = {
    source: 'r01',
    organizationId: 1,
    sensorId: 1,
    reason: 'bad-json',
    detail: 'd',
    sample: 's',
  } as const
  it('counts by source, reason and hour, and keeps the first sample', () => {
    const book = new RefusalBook()
    for (let each = 0; each < 3; each++)
      book.add({ ...refusal, sample: `s${each}`, receivedMs: nowMs + each * 20 * 60_000 })
    const rows = book.take()
    expect(rows.map((row) => [row.count, row.sample])).toEqual([
      [2, 's0'],
      [1, 's2'],
    ])
    book.putBack(rows)
    book.putBack(rows)
    expect(book.take().map((row) => row.count)).toEqual([4, 2])
  })
  it('stays small whatever strangers send, and loses no count', () => {
    const book = new RefusalBook()
    for (let each = 0; each < 7000; each++)
      book.add({ ...refusal, source: `address ${each}`, receivedMs: nowMs })
    expect(book.size).toBeLessThanOrEqual(5001)
    expect(book.take().reduce((sum, row) => sum + row.count, 0)).toBe(7000)
  })
})

describe('faults of the store', () => {
  const fault = (code: string | undefined, message = 'x') =>
    faultOf(Object.assign(new Error(message), { code })).kind
  it('tell bad data from a store that is away', () => {
    // SQLSTATE classes: PostgreSQL documentation, appendix A
    expect([fault('22003'), fault('23503'), fault('22021'), fault('54000')]).toEqual(Array(4).fill('final'))
    expect(fault('23514', 'no partition of relation "readings" found for row')).toBe('missing-month')
    expect(fault('23514', 'violates check constraint')).toBe('final')
    for (const code of ['57P01', '53100', '08006', '40P01', '42P01', 'ECONNREFUSED', 'ECONNRESET', undefined])
      expect(fault(code)).toBe('retry')
  })
  it('are tried again after growing pauses with a share of chance', () => {
    expect([0, 1, 2, 3, 10].map((tries) => retryDelayMs(tries, 50, 1000, () => 1))).toEqual([
      50, 100, 200, 400, 1000,
    ])
    expect(retryDelayMs(2, 50, 1000, () => 0)).toBe(100)
    expect(retryDelayMs(1e9, 50, 1000, () => 1)).toBe(1000)
  })
  it('waiting with a limit gives the result, the error, or nothing', async () => {
    expect(await within(Promise.resolve(7), 1000)).toBe(7)
    await expect(within(Promise.reject(new Error('no')), 1000)).rejects.toThrow('no')
    expect(await within(new Promise(() => undefined), 5)).toBeUndefined()
  })
})

describe('device secrets', () => {
  it('are 128 random bits, kept as SHA-256', () => {
    const secrets = Array.from({ length: 100 }, newDeviceSecret)
    expect(new Set(secrets).size).toBe(100)
    for (const secret of secrets) expect(secret).toMatch(/^[0-9a-f]{32}$/)
    // FIPS 180-2, appendix B.1
    expect(deviceSecretSha256('abc')).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad')
    expect(isDeviceSecret(Buffer.from('abc'), deviceSecretSha256('abc'))).toBe(true)
    expect(isDeviceSecret(Buffer.from('abd'), deviceSecretSha256('abc'))).toBe(false)
    expect(isDeviceSecret(Buffer.from('abc'), '')).toBe(false)
  })
})

describe('taking a publish', () => {
  const device: Device = {
    kind: 'sensor',
    id: 3,
    organizationId: 1,
    buildingId: 2,
    site: 'mill',
    deviceId: 'R01',
    userName: 'R01',
    secretSha256: '',
    retired: false,
  }
  const take = (of: Device, topic: string, payload: string) =>
    takePublish(of, topic, Buffer.from(payload), nowMs)
  it('gives rows with the device’s own ids', () => {
    expect(take(device, 'ebbmark/v1/mill/r01/readings', '{"co2_ppm":500}')).toMatchObject({
      readings: [{ sensorId: 3, buildingId: 2, co2Ppm: 500, receivedMs: nowMs }],
      refusals: [],
      retain: false,
    })
  })
  it('refuses what is another’s: topic, site, leaf', () => {
    for (const topic of [
      'ebbmark/v1/mill/r02/readings',
      'ebbmark/v1/forge/r01/readings',
      'ebbmark/v1/mill/r01/supply',
      'x',
    ])
      expect(take(device, topic, '{"co2_ppm":500}')).toMatchObject({
        readings: [],
        refusals: [{ reason: 'wrong-topic' }],
      })
    const gateway: Device = { ...device, kind: 'gateway', deviceId: 'AHU-1', userName: 'mill/AHU-1' }
    expect(take(gateway, 'ebbmark/v1/mill/AHU-1/readings', '{"co2_ppm":500}').refusals[0]?.reason).toBe(
      'wrong-topic',
    )
    expect(take(gateway, 'ebbmark/v1/mill/AHU-1/supply', '{"state":"on"}').supply).toMatchObject([
      { airHandlerId: 3 },
    ])
  })
})
