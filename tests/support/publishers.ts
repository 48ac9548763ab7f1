import { type ChildProcess, spawn } from 'node:child_process'
import path from 'node:path'
import type { TestSensor } from './broker'

/** What one publisher process has sent and got acknowledged: numbers of its readings. */
export type Publisher = {
  sensor: TestSensor
  salt: number
  /** instant of its reading 0, epoch milliseconds */
  baseMs: number
  sent: number
  waiting: number
  acknowledged: Set<number>
  child: ChildProcess
}

/** The value of reading `i` of a publisher, as publisher.mjs sends it. */
export function co2PpmOf(salt: number, i: number): number {
  return 400 + ((i * 7919 + salt * 104729) % 16000) / 4
}

/** Starts one publisher process for each sensor; each sends a reading every `everyMs` and holds at most `windowMax` unacknowledged. */
export function startPublishers(
  sensors: readonly TestSensor[],
  options: { port: number; baseMs: number; everyMs: number; windowMax: number; keepaliveS: number },
): Publisher[] {
  return sensors.map((sensor, salt) => {
    const words = { ...options, salt, deviceId: sensor.deviceId, secret: sensor.secret, topic: sensor.topic }
    const child = spawn(
      process.execPath,
      [path.resolve('tests/support/publisher.mjs'), JSON.stringify(words)],
      {
        env: { PATH: process.env.PATH, NODE_ENV: 'test' },
        stdio: ['ignore', 'ignore', 'inherit', 'ipc'],
      },
    )
    const publisher: Publisher = {
      sensor,
      salt,
      baseMs: options.baseMs,
      sent: 0,
      waiting: 0,
      acknowledged: new Set(),
      child,
    }
    child.on('message', (message: { sent: number; acknowledged: number[]; waiting: number }) => {
      publisher.sent = message.sent
      publisher.waiting = message.waiting
      for (const i of message.acknowledged) publisher.acknowledged.add(i)
    })
    return publisher
  })
}

/** Ends the publishers when all they sent is acknowledged, at the latest after `graceMs`. */
export async function finishPublishers(publishers: readonly Publisher[], graceMs: number): Promise<void> {
  await Promise.all(
    publishers.map(
      ({ child }) =>
        new Promise<void>((resolve) => {
          if (child.exitCode !== null) return resolve()
          const late = setTimeout(() => child.kill('SIGKILL'), graceMs)
          child.once('exit', () => {
            clearTimeout(late)
            resolve()
          })
          child.send('stop', () => undefined)
        }),
    ),
  )
}
