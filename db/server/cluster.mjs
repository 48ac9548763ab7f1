// One PostgreSQL cluster in a folder: made, started, adopted when it already runs, stopped. Loopback only. Plain Node.
import { spawn } from 'node:child_process'
import fs from 'node:fs'
import net from 'node:net'
import path from 'node:path'
import { run } from './binaries.mjs'

/** @typedef {import('./binaries.mjs').Binaries} Binaries */

/**
 * @typedef {object} Cluster
 * @property {string} dir
 * @property {number} port
 * @property {number} pid
 * @property {boolean} adopted true when it was already running
 * @property {() => Promise<void>} stop fast shutdown (SIGINT), waits until it has ended
 */

/**
 * Programs of PostgreSQL refuse to run as root: then they run as the user `postgres` (or nobody where there is none).
 * @returns {{ uid: number, gid: number } | null}
 */
export function serverIdentity() {
  if (process.getuid?.() !== 0) return null
  const lines = fs
    .readFileSync('/etc/passwd', 'utf8')
    .split('\n')
    .map((line) => line.split(':'))
  const entry = lines.find(([name]) => name === 'postgres') ?? lines.find(([name]) => name === 'nobody')
  if (!entry)
    throw new Error(
      'Running as root, and there is neither a user postgres nor nobody to run PostgreSQL as. Add one: useradd --system postgres',
    )
  return { uid: Number(entry[2]), gid: Number(entry[3]) }
}

/**
 * The command that runs a server program as the server's user. Where a folder above the data is closed to others (a clone in /root),
 * the program is given the one right to pass through folders.
 * @param {Binaries} binaries
 * @param {string} dir
 * @param {string} program
 * @param {string[]} args
 */
export function serverCommand(binaries, dir, program, args) {
  const identity = serverIdentity()
  const env = {
    ...process.env,
    LC_ALL: 'C.UTF-8',
    TZ: 'UTC',
    ...(binaries.libraryPath ? { LD_LIBRARY_PATH: binaries.libraryPath } : {}),
  }
  const command = path.join(binaries.bin, program)
  if (!identity) return { command, args, options: { env, cwd: '/' } }
  if (isReachable(dir) && isReachable(binaries.bin))
    return { command, args, options: { env, cwd: '/', ...identity } }
  const keep = [
    '--reuid',
    String(identity.uid),
    '--regid',
    String(identity.gid),
    '--clear-groups',
    '--inh-caps',
    '+dac_override',
    '--ambient-caps',
    '+dac_override',
  ]
  return { command: 'setpriv', args: [...keep, command, ...args], options: { env, cwd: '/' } }
}

/** @param {string} dir */
function isReachable(dir) {
  for (let at = path.dirname(path.resolve(dir)); ; at = path.dirname(at)) {
    if (fs.existsSync(at) && (fs.statSync(at).mode & 0o001) === 0) return false
    if (at === path.dirname(at)) return true
  }
}

/**
 * Makes the cluster when the folder has none. A folder left half-made by a killed start is made again; a finished one is never touched.
 * @param {{ binaries: Binaries, dir: string, superuserPassword: string | null, throwAway: boolean }} options
 */
export async function initCluster({ binaries, dir, superuserPassword, throwAway }) {
  const done = path.join(dir, 'ebbmark-initialised')
  if (fs.existsSync(done)) return
  fs.rmSync(dir, { recursive: true, force: true })
  fs.mkdirSync(dir, { recursive: true, mode: 0o700 })
  const identity = serverIdentity()
  if (identity) fs.chownSync(dir, identity.uid, identity.gid)
  const passwordFile = superuserPassword === null ? null : `${dir}.pw`
  if (passwordFile) {
    fs.writeFileSync(passwordFile, `${superuserPassword}\n`, { mode: 0o600 })
    if (identity) fs.chownSync(passwordFile, identity.uid, identity.gid)
  }
  const auth = passwordFile ? ['--auth=scram-sha-256', `--pwfile=${passwordFile}`] : ['--auth=trust']
  const words = serverCommand(binaries, dir, 'initdb', [
    '--no-sync',
    '-U',
    'postgres',
    '-E',
    'UTF8',
    '--locale=C.UTF-8',
    ...auth,
    '-D',
    dir,
  ])
  try {
    await run(words.command, words.args, words.options)
  } finally {
    if (passwordFile) fs.rmSync(passwordFile, { force: true })
  }
  fs.appendFileSync(path.join(dir, 'postgresql.conf'), settings(throwAway))
  fs.writeFileSync(done, '')
}

/** @param {boolean} throwAway */
function settings(throwAway) {
  const common = [
    "listen_addresses = '127.0.0.1'",
    "unix_socket_directories = ''",
    'max_connections = 200',
    'shared_buffers = 256MB',
    "timezone = 'GMT'",
    "log_timezone = 'GMT'",
    'max_wal_size = 2GB',
    'wal_compression = on',
    "log_min_messages = 'warning'",
  ]
  const careless = throwAway ? ['fsync = off', 'full_page_writes = off', 'autovacuum_naptime = 10s'] : []
  return `\n# Ebbmark\n${[...common, ...careless].join('\n')}\n`
}

/**
 * Starts the cluster, or adopts it when it already runs (after a kill -9 of everything else).
 * @param {{ binaries: Binaries, dir: string, port: number, logFile: string }} options
 * @returns {Promise<Cluster>}
 */
export async function startCluster({ binaries, dir, port, logFile }) {
  const running = runningServer(dir)
  if (running && (await isServing(dir, running.port, () => !isAlive(running.pid))))
    return { dir, ...running, adopted: true, stop: () => stopServer(running.pid, dir) }
  if (!running) fs.rmSync(path.join(dir, 'postmaster.pid'), { force: true })
  const out = fs.openSync(logFile, 'a')
  const words = serverCommand(binaries, dir, 'postgres', ['-D', dir, '-p', String(port)])
  const child = spawn(words.command, words.args, {
    ...words.options,
    stdio: ['ignore', out, out],
    detached: true,
  })
  fs.closeSync(out)
  child.unref()
  const pid = child.pid
  if (!pid) throw new Error(`PostgreSQL could not be started: ${words.command} was not found.`)
  let ended = false
  child.on('exit', () => (ended = true))
  if (await isServing(dir, port, () => ended))
    return { dir, port, pid, adopted: false, stop: () => stopServer(pid, dir) }
  const said = fs.readFileSync(logFile, 'utf8').trim().split('\n').slice(-5).join('\n')
  throw new Error(`PostgreSQL did not start on port ${port}. It said (${logFile}):\n${said}`)
}

/**
 * Waits until the server takes work. It answers on its port before that, while it still starts or recovers; `ready` in the eighth line
 * of postmaster.pid says that it is over.
 * @param {string} dir
 * @param {number} port
 * @param {() => boolean} hasEnded
 */
async function isServing(dir, port, hasEnded) {
  for (let tries = 0; tries < 600 && !hasEnded(); tries++) {
    if (isReady(dir) && (await answers(port))) return true
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
  return false
}

/** @param {string} dir */
function isReady(dir) {
  try {
    const lines = fs.readFileSync(path.join(dir, 'postmaster.pid'), 'utf8').split('\n')
    return lines[7]?.trim() === 'ready'
  } catch {
    return false
  }
}

/**
 * @param {string} dir
 * @returns {{ pid: number, port: number } | null} the live postmaster of this folder
 */
export function runningServer(dir) {
  try {
    const lines = fs.readFileSync(path.join(dir, 'postmaster.pid'), 'utf8').split('\n')
    const pid = Number(lines[0])
    const port = Number(lines[3])
    if (!pid || !port) return null
    process.kill(pid, 0)
    return fs.readFileSync(`/proc/${pid}/cmdline`, 'utf8').includes(dir) ? { pid, port } : null
  } catch {
    return null
  }
}

/**
 * Is a PostgreSQL accepting connections here? Asks with an SSL request, which every PostgreSQL answers with S or N.
 * @param {number} port
 * @returns {Promise<boolean>}
 */
export function answers(port) {
  return new Promise((resolve) => {
    const socket = net.connect({ host: '127.0.0.1', port, timeout: 2000 }, () =>
      socket.write(Buffer.from([0, 0, 0, 8, 4, 210, 22, 47])),
    )
    /** @param {boolean} value */
    const end = (value) => {
      socket.destroy()
      resolve(value)
    }
    socket.once('data', (data) => end(data[0] === 83 || data[0] === 78))
    socket.once('error', () => end(false))
    socket.once('timeout', () => end(false))
    socket.once('close', () => resolve(false))
  })
}

/**
 * @param {number} pid
 * @param {string} dir
 */
async function stopServer(pid, dir) {
  if (runningServer(dir)?.pid !== pid) return
  process.kill(pid, 'SIGINT')
  for (let tries = 0; tries < 200; tries++) {
    if (!isAlive(pid)) return
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
  process.kill(pid, 'SIGQUIT')
}

/** @param {number} pid */
function isAlive(pid) {
  try {
    process.kill(pid, 0)
    return !/^State:\s+Z/m.test(fs.readFileSync(`/proc/${pid}/status`, 'utf8'))
  } catch {
    return false
  }
}
