import type { Database } from '@/db/client'
import { type Device, findGatewayDevices, findSensorDevices } from '@/db/queries/devices'
import { parseUserName } from '@/lib/wire/topics'

type Held = { device: Device | undefined; untilMs: number }
type Waiting = { resolve: (device: Device | undefined) => void; reject: (error: Error) => void }

/** Names asked for in one query. */
const BATCH_NAMES = 2000
/** How long known devices are trusted without asking the database. */
const KNOWN_LIFE_MS = 30_000
/** How long a name is remembered as unknown. */
const UNKNOWN_LIFE_MS = 5_000
/** Names remembered at most. */
const NAMES_MAX = 200_000

/**
 * Devices by user name, without case, remembered for a short time. Names asked for while a query runs share the next one, so a thousand
 * connects at once cost a few queries, one at a time.
 */
export class Credentials {
  #held = new Map<string, Held>()
  #waiting = new Map<string, Waiting[]>()
  #asking = false
  readonly #database: Database
  readonly #nowMs: () => number

  constructor(database: Database, nowMs: () => number) {
    this.#database = database
    this.#nowMs = nowMs
  }

  /** The device of this user name where it is remembered as known, without asking. */
  remembered(userName: string): Device | undefined {
    const held = this.#held.get(userName.toLowerCase())
    return held && held.untilMs > this.#nowMs() ? held.device : undefined
  }

  /** The device of this user name, or undefined where none is registered. Rejects when the database does not answer. */
  find(userName: string): Promise<Device | undefined> {
    if (!parseUserName(userName)) return Promise.resolve(undefined)
    const key = userName.toLowerCase()
    const held = this.#held.get(key)
    if (held && held.untilMs > this.#nowMs()) return Promise.resolve(held.device)
    return new Promise((resolve, reject) => {
      const waiting = this.#waiting.get(key) ?? []
      waiting.push({ resolve, reject })
      this.#waiting.set(key, waiting)
      if (!this.#asking) void this.#askAll()
    })
  }

  /** The devices of these user names as they are now in the database. */
  async read(userNames: readonly string[]): Promise<Map<string, Device>> {
    const keys = [...new Set(userNames.map((name) => name.toLowerCase()))]
    const sensors = keys.filter((key) => !key.includes('/'))
    const gateways = keys.filter((key) => key.includes('/'))
    const devices = await this.#database.asSystemRaw('broker', async (client) => [
      ...(sensors.length > 0 ? await findSensorDevices(client, sensors) : []),
      ...(gateways.length > 0 ? await findGatewayDevices(client, gateways) : []),
    ])
    return new Map(devices.map((device) => [device.userName.toLowerCase(), device]))
  }

  /** Forgets everything: something about devices has changed. */
  forget(): void {
    this.#held.clear()
  }

  async #askAll(): Promise<void> {
    this.#asking = true
    await new Promise((resolve) => setImmediate(resolve))
    while (this.#waiting.size > 0) {
      const keys = [...this.#waiting.keys()].slice(0, BATCH_NAMES)
      const batch = keys.map((key) => [key, this.#waiting.get(key) ?? []] as const)
      for (const key of keys) this.#waiting.delete(key)
      try {
        const devices = await this.read(keys)
        for (const [key, waiting] of batch) {
          const device = devices.get(key)
          this.#hold(key, device)
          for (const { resolve } of waiting) resolve(device)
        }
      } catch (error) {
        for (const [, waiting] of batch) for (const { reject } of waiting) reject(error as Error)
      }
    }
    this.#asking = false
  }

  #hold(key: string, device: Device | undefined): void {
    if (this.#held.size >= NAMES_MAX) this.#held.clear()
    const lifeMs = device ? KNOWN_LIFE_MS : UNKNOWN_LIFE_MS
    this.#held.set(key, { device, untilMs: this.#nowMs() + lifeMs })
  }
}
