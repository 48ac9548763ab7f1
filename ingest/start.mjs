// npm start and npm run dev: everything from a bare clone to a running Ebbmark. Plain Node: nothing is installed yet when this runs.
import { spawn } from 'node:child_process'
import fs from 'node:fs'
import path from 'node:path'
import { runningServer } from '../db/server/cluster.mjs'
import { Child } from './stack/children.mjs'
import { takeDataDir } from './stack/lock.mjs'
import { ensurePackages } from './stack/packages.mjs'
import { choosePort } from './stack/ports.mjs'
import { fail, say, step } from './stack/say.mjs'
import { ensureSecrets } from './stack/secrets.mjs'
import { ensurePostgres, openStore } from './stack/store.mjs'
import { buildWebWhenStale } from './stack/web-build.mjs'

const root = path.resolve(import.meta.dirname, '..')
const dataDir = path.resolve(process.env.EBBMARK_DATA_DIR || path.join(root, '.data'))
const dev = process.argv.includes('--dev')
const demo = !process.argv.includes('--no-demo')
const host = process.env.HOST || '127.0.0.1'
const mqttHost = process.env.MQTT_HOST || '127.0.0.1'
/** A broker of the house instead of our own: then ingest workers share its messages. */
const outsideBroker = process.env.MQTT_URL || null
const workerCount = workersAsked()

/** @type {{ url: string | null, stopping: boolean, children: Child[], store: import('./stack/store.mjs').Store | null }} */
const state = { url: null, stopping: false, children: [], store: null }

await main().catch(fail)

async function main() {
  const unknown = process.argv.slice(2).filter((word) => !['--dev', '--no-demo'].includes(word))
  if (unknown.length > 0)
    throw new Error(`unknown option ${unknown.join(' ')}; known are --no-demo and --dev.`)
  if (!['127.0.0.1', 'localhost', '::1'].includes(host) && !process.env.PUBLIC_URL) {
    throw new Error(
      `HOST=${host} is reached from outside: set PUBLIC_URL to the address that people will use (https://…).`,
    )
  }
  const taken = await takeDataDir(dataDir, () => ({ pid: process.pid, url: state.url }))
  if ('running' in taken) {
    const { pid, url } = taken.running
    process.stdout.write(
      url
        ? `Ebbmark already runs on this data folder: ${url} (process ${pid})\n`
        : `Another start is under way on this data folder (process ${pid}).\n`,
    )
    return
  }
  for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM', 'SIGHUP']))
    process.on(signal, () => void stop(taken.release, signal))
  const ports = await choosePorts()
  const [, binaries] = await Promise.all([
    step('npm packages ready', () => ensurePackages(root)),
    process.env.DATABASE_URL ? null : step('PostgreSQL found', () => ensurePostgres(dataDir, say)),
  ])
  const store = await openStore({ dataDir, binaries, say })
  state.store = store
  say(store.words)
  const env = environment(ports, store)
  rememberEnvironment(env)
  const build = dev
    ? Promise.resolve()
    : step('web application built', () => buildWebWhenStale({ root, distDir: '.next', say }))
  build.catch(() => undefined) // awaited below; a set-up error must not be hidden by it
  await step('database migrated, demo and history ready', () => setUp(env))
  await build
  watchPostgres(store)
  await startChildren(env)
  state.url = env.PUBLIC_URL ?? null
  greet(env)
}

/** How many ingest workers stand beside an outside broker. @returns {number} */
function workersAsked() {
  const count = Number(process.env.INGEST_WORKERS || 1)
  if (Number.isInteger(count) && count >= 1 && count <= 64) return count
  return fail(
    new Error(`INGEST_WORKERS is ${process.env.INGEST_WORKERS}: expected a whole number from 1 to 64.`),
  )
}

async function choosePorts() {
  const taken = new Set()
  const choose = (/** @type {string} */ name, /** @type {number} */ fallback, /** @type {string} */ on) =>
    choosePort({ name, asked: process.env[name], fallback, host: on, taken, say })
  return {
    PORT: await choose('PORT', 3000, host),
    MQTT_PORT: outsideBroker
      ? Number(process.env.MQTT_PORT || 1883)
      : await choose('MQTT_PORT', 1883, mqttHost),
    SMTP_PORT: process.env.SMTP_HOST
      ? Number(process.env.SMTP_PORT || 25)
      : await choose('SMTP_PORT', 1025, '127.0.0.1'),
  }
}

/**
 * What every child sees.
 * @param {{ PORT: number, MQTT_PORT: number, SMTP_PORT: number }} ports
 * @param {import('./stack/store.mjs').Store} store
 * @returns {Record<string, string>}
 */
function environment(ports, store) {
  const given = Object.fromEntries(Object.entries(process.env).filter(([, value]) => value !== undefined))
  return {
    ...given,
    ...store.env,
    NODE_ENV: dev ? 'development' : 'production',
    NEXT_TELEMETRY_DISABLED: '1',
    EBBMARK_DATA_DIR: dataDir,
    EBBMARK_DEMO: demo ? '1' : '0',
    HOST: host,
    MQTT_HOST: mqttHost,
    PORT: String(ports.PORT),
    MQTT_PORT: String(ports.MQTT_PORT),
    SMTP_HOST: process.env.SMTP_HOST || '127.0.0.1',
    SMTP_PORT: String(ports.SMTP_PORT),
    PUBLIC_URL: process.env.PUBLIC_URL || `http://${host}:${ports.PORT}`,
    NEXTAUTH_SECRET: process.env.NEXTAUTH_SECRET || ensureSecrets(dataDir).sessionSecret,
  }
}

/** Kept for the other commands (npm run nightly …), which then find this database. @param {Record<string, string>} env */
function rememberEnvironment(env) {
  const names = [
    'DATABASE_URL',
    'DATABASE_OWNER_URL',
    'EBBMARK_DATA_DIR',
    'EBBMARK_DEMO',
    'HOST',
    'PORT',
    'MQTT_HOST',
    'MQTT_PORT',
    'SMTP_HOST',
    'SMTP_PORT',
    'PUBLIC_URL',
    'NEXTAUTH_SECRET',
  ]
  fs.writeFileSync(
    path.join(dataDir, 'environment.json'),
    JSON.stringify(Object.fromEntries(names.map((name) => [name, env[name]])), null, 2),
    { mode: 0o600 },
  )
}

/** Migrations, demo building, history: a process of its own. @param {Record<string, string>} env */
function setUp(env) {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, ['--import', 'tsx', 'ingest/setup/main.ts'], {
      cwd: root,
      env,
      stdio: ['ignore', 'pipe', 'inherit'],
    })
    child.stdout.on('data', (chunk) => String(chunk).split('\n').filter(Boolean).forEach(say))
    child.on('error', reject)
    child.on('close', (code) =>
      code === 0
        ? resolve(undefined)
        : reject(
            new Error(
              `setting up the database ended with ${code}; what it said is above. Nothing already stored is lost: start again to go on from there.`,
            ),
          ),
    )
  })
}

/** A PostgreSQL of ours that dies is started again. @param {import('./stack/store.mjs').Store} store */
function watchPostgres(store) {
  if (!store.cluster || !store.restart) return
  const { dir } = store.cluster
  let busy = false
  setInterval(async () => {
    if (busy || state.stopping || runningServer(dir)) return
    busy = true
    say('PostgreSQL ended; starting it again')
    store.cluster = await /** @type {() => Promise<import('../db/server/cluster.mjs').Cluster>} */ (
      store.restart
    )().catch((error) => {
      say(error.message)
      return store.cluster
    })
    busy = false
  }, 2000).unref()
}

/** @param {Record<string, string>} env */
async function startChildren(env) {
  const next = path.join(root, 'node_modules/next/dist/bin/next')
  const web = dev
    ? [next, 'dev', '-p', env.PORT ?? '', '-H', host]
    : [next, 'start', '-p', env.PORT ?? '', '-H', host]
  /** @type {import('./stack/children.mjs').Spec[]} */
  const specs = [
    ...ingestSpecs(),
    { name: 'feeds', args: ['ingest/feeds/main.ts'], typescript: true, reportsReady: true },
    { name: 'jobs', args: ['ingest/nightly/main.ts'], typescript: true, reportsReady: true },
    { name: 'web', args: web },
  ]
  if (!process.env.SMTP_HOST)
    specs.unshift({ name: 'mailbox', args: ['ingest/mailbox/main.ts'], typescript: true, reportsReady: true })
  const context = { root, env, say, output: logTo(path.join(dataDir, 'log')) }
  state.children = specs.map((spec) => new Child(spec, context))
  const ingest = outsideBroker ? `ingest workers (${workerCount})` : 'broker'
  await step(`${ingest}, jobs, mailbox and web started`, async () => {
    const ready = Promise.all(state.children.map((child) => child.start()))
    const late = new Promise((resolve) => setTimeout(() => resolve('late'), 60_000).unref())
    if ((await Promise.race([ready, late])) === 'late')
      say('not every process is ready yet; going on without it')
    await answersHttp(`http://${host === '0.0.0.0' ? '127.0.0.1' : host}:${env.PORT}/sign-in`)
  })
  if (!demo) return
  if (outsideBroker) {
    say('the demo’s sensors do not publish: the broker of MQTT_URL does not know them')
    return
  }
  const sensors = new Child(
    { name: 'demo', args: ['ingest/simulator/live.ts'], typescript: true, reportsReady: true },
    context,
  )
  state.children.push(sensors)
  void sensors.start()
}

/** Our own broker with the ingest inside, or workers on the shared subscription of an outside one. @returns {import('./stack/children.mjs').Spec[]} */
function ingestSpecs() {
  const common = { typescript: true, reportsReady: true }
  if (!outsideBroker) return [{ name: 'broker', args: ['ingest/broker/main.ts'], ...common }]
  return workerNames().map((name, index) => ({
    name,
    args: ['ingest/worker/main.ts'],
    env: { INGEST_WORKER: String(index + 1) },
    ...common,
  }))
}

function workerNames() {
  return Array.from({ length: workerCount }, (_, index) => `worker-${index + 1}`)
}

/** One log file a process; the newest lines of a broken one are where the message says. @param {string} dir */
function logTo(dir) {
  fs.mkdirSync(dir, { recursive: true })
  /** @type {Map<string, fs.WriteStream>} */
  const files = new Map()
  return (/** @type {string} */ name, /** @type {Buffer} */ chunk) => {
    const file = files.get(name) ?? fs.createWriteStream(path.join(dir, `${name}.log`), { flags: 'a' })
    files.set(name, file)
    file.write(chunk)
  }
}

/** @param {string} url */
async function answersHttp(url) {
  for (let tries = 0; tries < 600; tries++) {
    try {
      const response = await fetch(url, { redirect: 'manual' })
      if (response.status < 500) return
    } catch {
      // not listening yet
    }
    await new Promise((resolve) => setTimeout(resolve, 100))
  }
  throw new Error(`the web application did not answer at ${url}; see ${path.join(dataDir, 'log', 'web.log')}`)
}

/** @param {Record<string, string>} env */
function greet(env) {
  const words = path.join(dataDir, 'demo-people.json')
  if (demo && fs.existsSync(words)) {
    const { password, people } = JSON.parse(fs.readFileSync(words, 'utf8'))
    say(`demo sign-ins, all with the password ${password}`)
    for (const person of people) say(`  ${person.email}  ${person.roles.join(', ')}`)
    say(`local mailbox: ${env.PUBLIC_URL}/mailbox (SMTP on 127.0.0.1:${env.SMTP_PORT})`)
    if (!outsideBroker) say(`sensors publish to mqtt://${env.MQTT_HOST}:${env.MQTT_PORT}`)
  }
  process.stdout.write(`Ebbmark is ready at ${env.PUBLIC_URL}\n`)
}

/** Ends everything in order: sensors, web, jobs, broker or workers with feeds, mailbox, PostgreSQL. @param {() => void} release @param {string} signal */
async function stop(release, signal) {
  if (state.stopping) return
  state.stopping = true
  say(`${signal}: stopping`)
  const order = [['demo'], ['web'], ['jobs'], ['broker', 'feeds', ...workerNames()], ['mailbox']]
  for (const names of order) {
    const children = state.children.filter((child) => names.includes(child.spec.name))
    await Promise.all(children.map((child) => child.stop()))
  }
  await state.store?.cluster?.stop()
  release()
  say('stopped')
  process.exit(0)
}
