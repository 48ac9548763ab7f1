import { execFileSync, spawn } from 'node:child_process'
import fs from 'node:fs'
import net from 'node:net'
import os from 'node:os'
import path from 'node:path'
import { freePort } from './cluster'

const program =
  process.env.TEST_MOSQUITTO ||
  ['/usr/sbin/mosquitto', '/usr/local/sbin/mosquitto'].find((file) => fs.existsSync(file))

export type MosquittoOptions = {
  /** user name → password; undefined: anyone may connect */
  passwords?: Record<string, string>
  /** lines of an access list */
  acl?: readonly string[]
  tls?: boolean
  /** keep sessions and queues on disk, written every second */
  persistence?: boolean
}

export type Mosquitto = {
  port: number
  pid: () => number
  /** certificate of the authority that signed the broker's, PEM file; only with tls */
  caFile: string
  output: () => string
  end: (signal: NodeJS.Signals) => Promise<void>
  /** starts again on the same port and folder after an end */
  restart: () => Promise<void>
  remove: () => Promise<void>
}

/** A real Mosquitto on a free loopback port with a configuration of its own in a temporary folder; never the system's service. */
export async function startMosquitto(options: MosquittoOptions = {}): Promise<Mosquitto> {
  if (!program)
    throw new Error(
      'These tests need Mosquitto: npm test installs it (or: apt-get install mosquitto, TEST_MOSQUITTO).',
    )
  const dir = fs.mkdtempSync(path.join(os.tmpdir(), 'ebbmark-mosquitto-'))
  const port = await freePort()
  const caFile = path.join(dir, 'ca.crt')
  if (options.tls) makeCertificates(dir)
  fs.writeFileSync(path.join(dir, 'mosquitto.conf'), configurationOf(options, dir, port))
  let output = ''
  let child: ReturnType<typeof spawn>
  const start = async () => {
    child = spawn(program, ['-c', path.join(dir, 'mosquitto.conf')], { stdio: ['ignore', 'pipe', 'pipe'] })
    for (const stream of [child.stdout, child.stderr])
      stream?.on('data', (chunk) => (output = `${output}${chunk}`.slice(-50_000)))
    await listens(
      port,
      () => child.exitCode,
      () => output,
    )
  }
  const end = async (signal: NodeJS.Signals) => {
    if (child.exitCode !== null || child.signalCode !== null) return
    const gone = new Promise((resolve) => child.once('exit', resolve))
    child.kill(signal)
    await gone
  }
  await start()
  return {
    port,
    pid: () => child.pid!,
    caFile,
    output: () => output,
    end,
    restart: start,
    remove: async () => {
      await end('SIGKILL')
      fs.rmSync(dir, { recursive: true, force: true })
    },
  }
}

/** Mosquitto loses QoS 1 messages at its default limits; without limits it lost none. */
function configurationOf(options: MosquittoOptions, dir: string, port: number): string {
  const lines = [
    `listener ${port} 127.0.0.1`,
    'max_queued_messages 0',
    'max_inflight_messages 0',
    'log_dest stderr',
    'log_type error',
    'log_type warning',
    `allow_anonymous ${options.passwords ? 'false' : 'true'}`,
    // as root it would change its user and could not read its own folder
    ...(process.getuid?.() === 0 ? ['user root'] : []),
  ]
  if (options.tls)
    lines.push(`certfile ${path.join(dir, 'broker.crt')}`, `keyfile ${path.join(dir, 'broker.key')}`)
  if (options.persistence)
    lines.push('persistence true', `persistence_location ${dir}/`, 'autosave_interval 1')
  if (options.passwords) {
    const file = path.join(dir, 'passwords')
    const entries = Object.entries(options.passwords)
    fs.writeFileSync(file, entries.map(([name, password]) => `${name}:${password}\n`).join(''), {
      mode: 0o600,
    })
    execFileSync(path.join(path.dirname(program!), '../bin/mosquitto_passwd'), ['-U', file])
    lines.push(`password_file ${file}`)
  }
  if (options.acl) {
    const file = path.join(dir, 'acl')
    fs.writeFileSync(file, `${options.acl.join('\n')}\n`, { mode: 0o600 })
    lines.push(`acl_file ${file}`)
  }
  return `${lines.join('\n')}\n`
}

/** An authority and a certificate of 127.0.0.1 and localhost signed by it. */
function makeCertificates(dir: string): void {
  const openssl = (...words: string[]) =>
    execFileSync('openssl', words, { cwd: dir, stdio: ['ignore', 'ignore', 'pipe'] })
  const key = ['-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:prime256v1', '-nodes']
  openssl(
    'req',
    '-x509',
    ...key,
    '-keyout',
    'ca.key',
    '-out',
    'ca.crt',
    '-days',
    '2',
    '-subj',
    '/CN=test authority',
  )
  openssl('req', ...key, '-keyout', 'broker.key', '-out', 'broker.csr', '-subj', '/CN=localhost')
  fs.writeFileSync(path.join(dir, 'names'), 'subjectAltName=IP:127.0.0.1,DNS:localhost\n')
  const signing = ['-CA', 'ca.crt', '-CAkey', 'ca.key', '-CAcreateserial', '-days', '2', '-extfile', 'names']
  openssl('x509', '-req', '-in', 'broker.csr', ...signing, '-out', 'broker.crt')
}

async function listens(port: number, exitCode: () => number | null, output: () => string): Promise<void> {
  for (let tries = 0; tries < 200; tries++) {
    if (exitCode() !== null) throw new Error(`Mosquitto ended at its start:\n${output()}`)
    const socket = net.connect({ port, host: '127.0.0.1' })
    const isOpen = await new Promise<boolean>((resolve) => {
      socket.once('connect', () => resolve(true))
      socket.once('error', () => resolve(false))
    })
    socket.destroy()
    if (isOpen) return
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
  throw new Error(`Mosquitto does not listen on ${port}:\n${output()}`)
}
