import { spawn } from 'node:child_process'
import path from 'node:path'
import mqtt, { type IClientOptions, type MqttClient } from 'mqtt'
import type pg from 'pg'
import type { Database } from '@/db/client'
import { deviceSecretSha256, newDeviceSecret } from '@/db/device-secret'
import { newPublicId } from '@/db/public-id'
import { freePort } from './cluster'

export type BrokerProcess = {
  pid: number
  port: number
  /** what it has written to its log */
  output: () => string
  /** sends a signal and waits for the end; resolves with exit code or signal */
  end: (signal: NodeJS.Signals) => Promise<number | NodeJS.Signals | null>
  ended: Promise<number | NodeJS.Signals | null>
  /** closes the channel to its parent, as when the parent dies */
  disconnect: () => void
}

/** Starts the real broker process and waits until it says that it is ready. */
export async function startBroker(options: {
  appUrl: string
  port?: number
  env?: Record<string, string>
}): Promise<BrokerProcess> {
  const port = options.port ?? (await freePort())
  const child = spawn(process.execPath, ['--import', 'tsx', path.resolve('ingest/broker/main.ts')], {
    env: {
      PATH: process.env.PATH,
      NODE_ENV: 'test',
      DATABASE_URL: options.appUrl,
      MQTT_PORT: String(port),
      ...options.env,
    },
    stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
  })
  let output = ''
  child.stdout?.on('data', (chunk) => (output = `${output}${chunk}`.slice(-200_000)))
  child.stderr?.on('data', (chunk) => (output = `${output}${chunk}`.slice(-200_000)))
  const ended = new Promise<number | NodeJS.Signals | null>((resolve) =>
    child.once('exit', (code, signal) => resolve(signal ?? code)),
  )
  await new Promise<void>((resolve, reject) => {
    child.once('message', () => resolve())
    child.once('exit', () => reject(new Error(`the broker ended before it was ready:\n${output}`)))
  })
  return {
    pid: child.pid!,
    port,
    output: () => output,
    end: (signal) => {
      child.kill(signal)
      return ended
    },
    ended,
    disconnect: () => child.disconnect(),
  }
}

export type TestSensor = { id: number; deviceId: string; secret: string; site: string; topic: string }
export type TestSite = {
  organizationId: number
  buildingId: number
  site: string
  addSensor: (deviceId: string) => Promise<TestSensor>
}

/** An organisation with one building, and a way to register sensors in it. */
export async function makeSite(database: Database, site: string): Promise<TestSite> {
  const [organizationId, buildingId] = await database.asSystemRaw('test', async (client) => {
    const organization = await client.query(
      'INSERT INTO organizations (public_id, name) VALUES ($1, $2) RETURNING id',
      [newPublicId(), `Owner of ${site}`],
    )
    const building = await client.query(
      `INSERT INTO buildings (organization_id, slug, name, time_zone) VALUES ($1, $2, $2, 'Europe/Lisbon') RETURNING id`,
      [organization.rows[0].id, site],
    )
    return [organization.rows[0].id as number, building.rows[0].id as number]
  })
  const addSensor = async (deviceId: string): Promise<TestSensor> => {
    const secret = newDeviceSecret()
    const id = await database.asSystemRaw('test', async (client) => {
      const added = await client.query(
        `INSERT INTO sensors (organization_id, building_id, device_id, device_id_key, label, secret_sha256)
         VALUES ($1, $2, $3, lower($3), $3, $4) RETURNING id`,
        [organizationId, buildingId, deviceId, deviceSecretSha256(secret)],
      )
      return added.rows[0].id as number
    })
    return { id, deviceId, secret, site, topic: `ebbmark/v1/${site}/${deviceId}/readings` }
  }
  return { organizationId, buildingId, site, addSensor }
}

/** Connects as a sensor; rejects with the broker's refusal. */
export function connectSensor(
  port: number,
  sensor: Pick<TestSensor, 'deviceId' | 'secret'>,
  options: IClientOptions = {},
): Promise<MqttClient> {
  const client = mqtt.connect(`mqtt://127.0.0.1:${port}`, {
    clientId: sensor.deviceId,
    username: sensor.deviceId,
    password: sensor.secret,
    reconnectPeriod: 0,
    connectTimeout: 10_000,
    ...options,
  })
  return new Promise((resolve, reject) => {
    client.once('connect', () => resolve(client))
    client.once('error', (error) => {
      client.end(true)
      reject(error)
    })
    client.once('close', () => reject(new Error('closed before it was connected')))
  })
}

/** The CONNACK return code of a connect that must fail. */
export async function refusedWith(connecting: Promise<MqttClient>): Promise<number | string> {
  try {
    const client = await connecting
    client.end(true)
    return 'connected'
  } catch (error) {
    const { code, message } = error as { code?: number; message: string }
    return code ?? message
  }
}

/** Publishes with QoS 1; resolves when it is acknowledged. */
export function publish(
  client: MqttClient,
  topic: string,
  payload: unknown,
  options: { qos?: 0 | 1 | 2; retain?: boolean } = {},
): Promise<void> {
  const bytes = Buffer.isBuffer(payload)
    ? payload
    : typeof payload === 'string'
      ? payload
      : JSON.stringify(payload)
  return new Promise((resolve, reject) =>
    client.publish(topic, bytes, { qos: 1, ...options }, (error) => (error ? reject(error) : resolve())),
  )
}

/** Rows as the owner of the database sees them. */
export async function rows<T extends pg.QueryResultRow>(
  database: Database,
  text: string,
  values: unknown[] = [],
): Promise<T[]> {
  return (await database.asSystemRaw('test', (client) => client.query<T>(text, values))).rows
}

/** Asks until the answer is the wanted one, for what is written a moment after it happened. */
export async function eventually<T>(
  ask: () => Promise<T>,
  isWanted: (answer: T) => boolean,
  ms = 5000,
): Promise<T> {
  const until = Date.now() + ms
  for (;;) {
    const answer = await ask()
    if (isWanted(answer) || Date.now() > until) return answer
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
}
