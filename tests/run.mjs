// npm test: installs what is missing, starts throw-away services, runs every test, ends with one line of totals. Plain Node.
import { spawn } from 'node:child_process'
import fs from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { findPostgres, installDebian, installPostgres } from '../db/server/binaries.mjs'
import { initCluster, startCluster } from '../db/server/cluster.mjs'
import { ensurePackages } from '../ingest/stack/packages.mjs'
import { choosePort } from '../ingest/stack/ports.mjs'
import { say, step } from '../ingest/stack/say.mjs'
import { buildWebWhenStale } from '../ingest/stack/web-build.mjs'

const root = path.resolve(import.meta.dirname, '..')
const words = process.argv.slice(2)
const webDist = '.next-test'

const scratch = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-test-'))
fs.chmodSync(scratch, 0o755)
/** @type {import('../db/server/cluster.mjs').Cluster | null} */
let cluster = null
/** @type {Set<import('node:child_process').ChildProcess>} */
const running = new Set()

for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM'])) {
  process.on(signal, async () => {
    for (const child of running) child.kill('SIGTERM')
    await cleanUp()
    process.exit(130)
  })
}

try {
  process.exitCode = await main()
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
  process.stdout.write('0 passed, 1 failed\n')
  process.exitCode = 1
} finally {
  await cleanUp()
}

async function main() {
  const [, binaries, chromium, mosquitto] = await Promise.all([
    step('npm packages ready', () => ensurePackages(root)),
    // one after the other: apt-get works alone
    step(
      'PostgreSQL ready',
      async () => findPostgres(scratch) ?? installPostgres({ dataDir: path.join(root, '.data'), say }),
    ),
    Promise.resolve(null),
  ]).then(
    async ([packages, found]) =>
      /** @type {const} */ ([
        packages,
        found,
        await step('Chromium ready', ensureChromium),
        await step('Mosquitto ready', ensureMosquitto),
      ]),
  )
  const data = path.join(scratch, 'postgres')
  const port = await choosePort({
    name: 'PG_PORT',
    asked: undefined,
    fallback: 55500,
    host: '127.0.0.1',
    say,
  })
  await step('throw-away PostgreSQL started', async () => {
    await initCluster({ binaries, dir: data, superuserPassword: null, throwAway: true })
    cluster = await startCluster({ binaries, dir: data, port, logFile: path.join(scratch, 'postgres.log') })
  })
  const browserToo = words.length === 0 || words.some((word) => /browser|integration|web/.test(word))
  if (browserToo)
    await step('web application built for the tests', () =>
      buildWebWhenStale({ root, distDir: webDist, say }),
    )
  const env = {
    ...process.env,
    TEST_OWNER_URL: `postgres://postgres@127.0.0.1:${port}`,
    TEST_WEB_DIST: webDist,
    TEST_CHROMIUM: chromium,
    TEST_MOSQUITTO: mosquitto,
    NODE_ENV: 'test',
    LOG_LEVEL: 'warn',
    NEXT_TELEMETRY_DISABLED: '1',
  }
  const totals = { passed: 0, failed: 0 }
  if (words.length === 0) {
    add(totals, await check('types', [path.join(root, 'node_modules/typescript/bin/tsc'), '--noEmit'], env))
    add(
      totals,
      await check(
        'lint and format',
        [path.join(root, 'node_modules/@biomejs/biome/bin/biome'), 'check', '--max-diagnostics=30', '.'],
        env,
      ),
    )
  }
  add(totals, await vitest(env))
  process.stdout.write(`${totals.passed} passed, ${totals.failed} failed\n`)
  return totals.failed === 0 && totals.passed > 0 ? 0 : 1
}

/** @param {{ passed: number, failed: number }} totals @param {{ passed: number, failed: number }} more */
function add(totals, more) {
  totals.passed += more.passed
  totals.failed += more.failed
}

/** Debian's Chromium, installed when missing. @returns {Promise<string>} */
async function ensureChromium() {
  const known =
    process.env.TEST_CHROMIUM ||
    ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'].find((file) =>
      fs.existsSync(file),
    )
  if (known) return known
  if (process.getuid?.() !== 0)
    throw new Error(
      'The browser tests need Chromium: install it (as root: apt-get install chromium) or set TEST_CHROMIUM to its program.',
    )
  await installDebian(['chromium'])
  return '/usr/bin/chromium'
}

/** Debian's Mosquitto, an outside broker for the tests; installed when missing, its service neither started nor enabled. @returns {Promise<string>} */
async function ensureMosquitto() {
  const known =
    process.env.TEST_MOSQUITTO ||
    ['/usr/sbin/mosquitto', '/usr/local/sbin/mosquitto'].find((file) => fs.existsSync(file))
  if (known) return known
  if (process.getuid?.() !== 0)
    throw new Error(
      'The tests of outside brokers need Mosquitto: install it (as root: apt-get install mosquitto) or set TEST_MOSQUITTO to its program.',
    )
  await installDebian(['mosquitto'], { services: ['mosquitto.service'] })
  return '/usr/sbin/mosquitto'
}

/** @param {string} name @param {string[]} args @param {NodeJS.ProcessEnv} env */
async function check(name, args, env) {
  const code = await spawned(args, env)
  say(`${name}: ${code === 0 ? 'well' : 'not well (above)'}`)
  return { passed: code === 0 ? 1 : 0, failed: code === 0 ? 0 : 1 }
}

/** @param {NodeJS.ProcessEnv} env */
async function vitest(env) {
  const report = path.join(scratch, 'report.json')
  const code = await spawned(
    [
      path.join(root, 'node_modules/vitest/vitest.mjs'),
      'run',
      '--reporter=default',
      '--reporter=json',
      `--outputFile.json=${report}`,
      ...words,
    ],
    env,
  )
  if (!fs.existsSync(report)) return { passed: 0, failed: 1 }
  const { numPassedTests, numFailedTests, testResults } = JSON.parse(fs.readFileSync(report, 'utf8'))
  // a file that could not be loaded has no failed test of its own, and an error between tests has none at all
  const brokenFiles = testResults.filter(
    (/** @type {any} */ file) =>
      file.status === 'failed' &&
      file.assertionResults.every((/** @type {any} */ test) => test.status !== 'failed'),
  ).length
  const failed = numFailedTests + brokenFiles
  return { passed: numPassedTests, failed: code !== 0 && failed === 0 ? 1 : failed }
}

/** @param {string[]} args @param {NodeJS.ProcessEnv} env @returns {Promise<number>} */
function spawned(args, env) {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, args, { cwd: root, env, stdio: ['ignore', 'inherit', 'inherit'] })
    running.add(child)
    child.on('error', reject)
    child.on('close', (code) => {
      running.delete(child)
      resolve(code ?? 1)
    })
  })
}

async function cleanUp() {
  await cluster?.stop()
  cluster = null
  fs.rmSync(scratch, { recursive: true, force: true })
}
