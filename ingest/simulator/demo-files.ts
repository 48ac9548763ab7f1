import { createHmac, randomBytes } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'
import type { SimulationState } from './simulation'

/** The seed of every installation's demo, so that two of them can be compared. */
export const DEMO_SEED = 1

/** What must be remembered to make the same demo again. */
export type DemoBirth = { seed: number; firstStart: string }

function writeWhole(file: string, text: string, mode = 0o644): void {
  fs.mkdirSync(path.dirname(file), { recursive: true })
  fs.writeFileSync(`${file}.new`, text, { mode })
  fs.renameSync(`${file}.new`, file) // whole or not at all, also when killed
}

function readJson<T>(file: string): T | undefined {
  try {
    return JSON.parse(fs.readFileSync(file, 'utf8')) as T
  } catch {
    return undefined
  }
}

/** Seed and first start of the demo kept under a data folder, or undefined where there is none. */
export function readBirth(dataDir: string): DemoBirth | undefined {
  const birth = readJson<DemoBirth>(path.join(dataDir, 'demo.json'))
  return birth && Number.isInteger(birth.seed) && !Number.isNaN(Date.parse(birth.firstStart))
    ? birth
    : undefined
}

export function writeBirth(dataDir: string, birth: DemoBirth): void {
  writeWhole(path.join(dataDir, 'demo.json'), `${JSON.stringify(birth, null, 2)}\n`)
}

export function writeTruth(file: string, truth: object): void {
  writeWhole(file, `${JSON.stringify(truth)}\n`)
}

/** States kept: one an hour, so that the newest before a gap's start is never far. */
const STATES_KEPT = 6

type SavedStates = { birth: DemoBirth; plan: number; states: SimulationState[] }

function savedStates(dataDir: string, birth: DemoBirth): SimulationState[] {
  const saved = readJson<SavedStates>(path.join(dataDir, 'demo-state.json'))
  const same = saved?.birth.seed === birth.seed && saved.birth.firstStart === birth.firstStart
  return same && saved.plan === PLAN_VERSION ? saved.states : []
}

/** The newest saved state of this birth at or before an epoch minute; it saves time and is never needed. */
export function readState(dataDir: string, birth: DemoBirth, minute: number): SimulationState | undefined {
  return savedStates(dataDir, birth)
    .filter((state) => state.minute <= minute)
    .at(-1)
}

/** Keeps a state beside the newest earlier ones. */
export function keepState(dataDir: string, birth: DemoBirth, state: SimulationState): void {
  const earlier = savedStates(dataDir, birth).filter((s) => s.minute < state.minute)
  const kept: SavedStates = { birth, plan: PLAN_VERSION, states: [...earlier, state].slice(-STATES_KEPT) }
  writeWhole(path.join(dataDir, 'demo-state.json'), JSON.stringify(kept))
}

/** Raised whenever the mill's plan or physics change, so that no state of an older one is gone on from. */
const PLAN_VERSION = 3

/** The random key of this installation's demo sensors, made once, readable by its owner only. */
export function demoKey(dataDir: string): string {
  const file = path.join(dataDir, 'demo-secret')
  if (!fs.existsSync(file)) writeWhole(file, `${randomBytes(32).toString('hex')}\n`, 0o600)
  return fs.readFileSync(file, 'utf8').trim()
}

/** A demo sensor's secret: 128 bits of HMAC-SHA-256 of its device id under the key, as 32 hexadecimal digits. */
export function sensorSecret(key: string, deviceId: string): string {
  return createHmac('sha256', key).update(deviceId).digest('hex').slice(0, 32)
}
