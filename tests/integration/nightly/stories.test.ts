import fs from 'node:fs/promises'
import os from 'node:os'
import path from 'node:path'
import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import * as schema from '@/db/schema'
import { catchUp } from '@/ingest/nightly/catch-up'
import { seedDemo } from '@/ingest/simulator/load'
import type { StorySwitches } from '@/ingest/simulator/story'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

/** A Thursday; five weeks before it hold every story but the first weeks of the drift. */
const NOW = new Date('2026-11-26T13:20:00Z')
const HISTORY_S = 35 * 86_400
const NONE: StorySwitches = {
  halfSupply: false,
  earlyStop: false,
  driftingSensor: false,
  silentSensor: false,
  nightVentilation: false,
  smallRoom: false,
}

type Told = {
  findings: { kind: string; subject: string; detail: Record<string, unknown>; firstNight: string }[]
  changes: { room: string; kind: string; onNight: string; ratio: number }[]
  verdicts: { room: string; airHandler: string | null; verdict: string | null }[]
}

/** Seeds the mill, analyses it, and reads back what it is said to do. */
async function tell(test: TestDatabase, stories: StorySwitches): Promise<Told> {
  const dataDir = await fs.mkdtemp(path.join(os.tmpdir(), 'ebbmark-mill-'))
  try {
    await seedDemo({ database: test.database, dataDir, now: NOW, historyS: HISTORY_S, stories })
    await catchUp({ database: test.database, clock: { now: () => NOW }, say: () => undefined })
  } finally {
    await fs.rm(dataDir, { recursive: true, force: true })
  }
  return test.database.asSystem('test', async (tx) => {
    const rooms = await tx.select().from(schema.rooms)
    const handlers = await tx.select().from(schema.airHandlers)
    const sensors = await tx.select().from(schema.sensors)
    const numberOf = (id: number | null) => rooms.find((room) => room.id === id)?.number ?? ''
    const codeOf = (id: number | null) => handlers.find((handler) => handler.id === id)?.code ?? null
    const findings = (await tx.select().from(schema.findings)).map((row) => {
      const detail = row.detail as Record<string, unknown>
      const sensor = sensors.find((one) => one.id === detail.sensorId)
      return {
        kind: row.kind,
        subject: sensor?.deviceId ?? (row.roomId === null ? codeOf(row.airHandlerId)! : numberOf(row.roomId)),
        detail,
        firstNight: row.firstNight,
      }
    })
    const changes = (await tx.select().from(schema.rateChanges)).map((row) => ({
      room: numberOf(row.roomId),
      kind: row.kind,
      onNight: row.onNight,
      ratio: row.ratio,
    }))
    const verdicts = (
      await tx.select().from(schema.roomWeeks).where(eq(schema.roomWeeks.weekStart, '2026-11-23'))
    )
      .filter((row) => row.verdict !== null)
      .map((row) => ({
        room: numberOf(row.roomId),
        airHandler: codeOf(rooms.find((room) => room.id === row.roomId)!.airHandlerId),
        verdict: row.verdict,
      }))
    return { findings, changes, verdicts }
  })
}

const databases: TestDatabase[] = []
let told: Told
let quiet: Told

beforeAll(async () => {
  for (const _ of [1, 2]) databases.push(await createTestDatabase())
  told = await tell(databases[0]!, {})
  quiet = await tell(databases[1]!, NONE)
}, 300_000)
afterAll(async () => {
  for (const test of databases) await test.drop()
})

const about = (from: Told, kind: string) => from.findings.filter((finding) => finding.kind === kind)

describe('the stories of the mill, found from its readings alone', () => {
  it('finds the air handler that stops at 17:30 instead of 19:00, and calls no room of it short for that', () => {
    const [finding, ...others] = about(told, 'supply stopped early')
    expect(others).toEqual([])
    expect(finding).toMatchObject({ subject: 'AH-2', detail: { enteredEnd: '19:00' } })
    expect(['17:25', '17:30', '17:35']).toContain(finding!.detail.stopsAt)
    // it began on the Monday sixteen days or so before
    expect(finding!.firstNight >= '2026-11-09').toBe(true)
    expect(
      told.verdicts.filter((room) => room.airHandler === 'AH-2' && room.verdict === 'short of basis'),
    ).toEqual([])
  })

  it('finds the room whose supply fell to half three weeks ago', () => {
    const step = told.changes.find((change) => change.room === '2.02' && change.kind === 'step')
    expect(step!.ratio).toBeGreaterThan(0.42)
    expect(step!.ratio).toBeLessThan(0.62)
    expect(['2026-11-04', '2026-11-05', '2026-11-06', '2026-11-07']).toContain(step!.onNight)
    expect(told.verdicts.find((room) => room.room === '2.02')?.verdict).toBe('short of basis')
  })

  it('finds the drifting sensor, the silent one and the room too small for its use', () => {
    expect(about(told, 'sensor drifting').map((finding) => finding.subject)).toEqual(['sm-205'])
    expect(about(told, 'sensor silent').map((finding) => finding.subject)).toEqual(['sm-105'])
    expect(about(told, 'too small for its use')).toMatchObject([
      { subject: '1.02', detail: { designHeadcount: 6 } },
    ])
  })

  it('finds the library that is ventilated while empty', () => {
    expect(about(told, 'ventilated while empty').map((finding) => finding.subject)).toEqual(['2.08'])
  })
})

describe('the same mill without its stories', () => {
  it('has none of these findings, and the figures of its rooms differ', () => {
    for (const kind of [
      'supply stopped early',
      'sensor drifting',
      'sensor silent',
      'too small for its use',
      'ventilated while empty',
    ])
      expect(about(quiet, kind), kind).toEqual([])
    expect(quiet.changes.filter((change) => change.room === '2.02')).toEqual([])
    expect(quiet.verdicts.find((room) => room.room === '2.02')?.verdict).not.toBe('short of basis')
  })
})
