import fs from 'node:fs'
import net from 'node:net'
import os from 'node:os'
import path from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { takeDataDir } from '@/ingest/stack/lock.mjs'
import { choosePort } from '@/ingest/stack/ports.mjs'
import { ensureSecrets } from '@/ingest/stack/secrets.mjs'

let dir: string
beforeEach(() => {
  dir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-stack-'))
})
afterEach(() => fs.rmSync(dir, { recursive: true, force: true }))

function occupy(): Promise<{ port: number; server: net.Server }> {
  return new Promise((resolve) => {
    const server = net
      .createServer()
      .listen(0, '127.0.0.1', () => resolve({ port: (server.address() as net.AddressInfo).port, server }))
  })
}

describe('ports', () => {
  it('takes the next free one when the default is taken, and says so', async () => {
    const { port, server } = await occupy()
    const said: string[] = []
    const chosen = await choosePort({
      name: 'PORT',
      asked: undefined,
      fallback: port,
      host: '127.0.0.1',
      say: (line: string) => said.push(line),
    })
    server.close()
    expect(chosen).toBeGreaterThan(port)
    expect(said.join()).toContain(`port ${port} is taken: PORT is ${chosen}`)
  })

  it('refuses one that was asked for and is taken', async () => {
    const { port, server } = await occupy()
    const chosen = choosePort({
      name: 'PORT',
      asked: String(port),
      fallback: 3000,
      host: '127.0.0.1',
      say: () => undefined,
    })
    await expect(chosen).rejects.toThrow(`PORT=${port} is taken on 127.0.0.1`)
    server.close()
  })

  it('refuses what is no port', async () => {
    const chosen = choosePort({
      name: 'MQTT_PORT',
      asked: 'mqtt',
      fallback: 1883,
      host: '127.0.0.1',
      say: () => undefined,
    })
    await expect(chosen).rejects.toThrow('MQTT_PORT=mqtt is not a port')
  })
})

describe('one start per data folder', () => {
  it('answers the running one, and takes over from a dead one', async () => {
    const first = await takeDataDir(dir, () => ({ pid: 1, url: 'http://127.0.0.1:3000' }))
    expect(first).toHaveProperty('release')
    expect(await takeDataDir(dir, () => ({ pid: 2, url: null }))).toEqual({
      running: { pid: 1, url: 'http://127.0.0.1:3000' },
    })
    if ('release' in first) first.release()
    fs.writeFileSync(path.join(dir, 'start.sock'), '') // what a kill -9 leaves: a name that nobody answers
    expect(await takeDataDir(dir, () => ({ pid: 3, url: null }))).toHaveProperty('release')
  })
})

it('makes the secrets once, for their owner only', () => {
  const made = ensureSecrets(dir)
  expect(ensureSecrets(dir)).toEqual(made)
  expect(fs.statSync(path.join(dir, 'secrets.json')).mode & 0o077).toBe(0)
  expect(new Set(Object.values(made)).size).toBe(4)
})
