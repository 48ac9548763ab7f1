import { type ChildProcess, spawn } from 'node:child_process'
import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import type { TestProject } from 'vitest/node'
import { freePort } from './cluster'
import { createTestDatabase } from './database'
import { startWeb } from './web'

/** The whole demo stack that all browser tests of a run share: real database, broker, mailbox, sensors, web. */
export type SharedStack = {
  webUrl: string
  mqttPort: number
  smtpPort: number
  dataDir: string
  appUrl: string
  ownerUrl: string
}

declare module 'vitest' {
  export interface ProvidedContext {
    stack: SharedStack
  }
}

const root = process.cwd()

/** Global set-up of the browser tests. */
export default async function setup(project: TestProject): Promise<() => Promise<void>> {
  const dataDir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-browser-'))
  const test = await createTestDatabase()
  const [mqttPort, smtpPort] = [await freePort(), await freePort()]
  const env = {
    DATABASE_URL: test.appUrl,
    DATABASE_OWNER_URL: test.ownerUrl,
    EBBMARK_DATA_DIR: dataDir,
    EBBMARK_DEMO: '1',
    MQTT_PORT: String(mqttPort),
    SMTP_PORT: String(smtpPort),
    NODE_ENV: 'production' as const,
    LOG_LEVEL: 'warn',
  }
  await finished(run('ingest/setup/main.ts', env), 'the set-up')
  const web = await startWeb({ databaseUrl: test.appUrl, env })
  const mains = ['mailbox', 'broker', 'feeds', 'nightly'].map((name) => `ingest/${name}/main.ts`)
  const children = mains.map((main) => run(main, { ...env, PUBLIC_URL: web.url }))
  await Promise.all(children.map(isReady))
  const sensors = run('ingest/simulator/live.ts', env)
  await isReady(sensors)
  project.provide('stack', {
    webUrl: web.url,
    mqttPort,
    smtpPort,
    dataDir,
    appUrl: test.appUrl,
    ownerUrl: test.ownerUrl,
  })
  return async () => {
    for (const child of [sensors, ...children.reverse()]) await ended(child)
    await web.stop()
    await test.drop()
    fs.rmSync(dataDir, { recursive: true, force: true })
  }
}

function run(main: string, env: Record<string, string> & { NODE_ENV: 'production' }): ChildProcess {
  const child = spawn(process.execPath, ['--import', 'tsx', main], {
    cwd: root,
    env: { ...process.env, ...env },
    stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
  })
  const said: string[] = []
  for (const stream of [child.stdout, child.stderr]) stream?.on('data', (chunk) => said.push(String(chunk)))
  child.on(
    'exit',
    (code) => code && process.stderr.write(`${main} ended with ${code}:\n${said.join('').slice(-4000)}\n`),
  )
  return child
}

function finished(child: ChildProcess, what: string): Promise<void> {
  return new Promise((resolve, reject) => {
    child.on('exit', (code) => (code === 0 ? resolve() : reject(new Error(`${what} ended with ${code}`))))
  })
}

function isReady(child: ChildProcess): Promise<void> {
  return new Promise((resolve, reject) => {
    child.on('message', (message: { ready?: boolean }) => message?.ready && resolve())
    child.on('exit', (code) =>
      reject(new Error(`a process of the stack ended with ${code} before it was ready`)),
    )
  })
}

async function ended(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null) return
  const gone = new Promise((resolve) => child.once('exit', resolve))
  child.kill('SIGTERM')
  const late = setTimeout(() => child.kill('SIGKILL'), 10_000)
  await gone
  clearTimeout(late)
}
