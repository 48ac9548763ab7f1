// Finds PostgreSQL's programs, and brings them from Debian when there are none. Plain Node: nothing is installed yet when this runs.
import { spawn } from 'node:child_process'
import fs from 'node:fs'
import path from 'node:path'

const leastMajor = 15

/** @typedef {{ bin: string, libraryPath: string | null, origin: string }} Binaries */

/**
 * Looks in /usr/lib/postgresql/<major>/bin (Debian keeps it off PATH), in Debian packages unpacked under the data folder, and on PATH last.
 * @param {string} dataDir
 * @returns {Binaries | null} the newest of version 15 or later that has initdb, postgres and pg_ctl
 */
export function findPostgres(dataDir) {
  const unpacked = path.join(dataDir, 'debian')
  for (const [root, origin] of [
    ['/', 'installed'],
    [unpacked, 'unpacked under the data folder'],
  ]) {
    const base = path.join(root, 'usr/lib/postgresql')
    const majors = fs.existsSync(base)
      ? fs
          .readdirSync(base)
          .map(Number)
          .filter((major) => major >= leastMajor)
      : []
    for (const major of majors.sort((a, b) => b - a)) {
      const bin = path.join(base, String(major), 'bin')
      if (isComplete(bin)) return { bin, libraryPath: root === '/' ? null : libraryPathOf(root), origin }
    }
  }
  for (const bin of (process.env.PATH ?? '').split(':')) {
    if (bin && isComplete(bin) && majorOf(bin) >= leastMajor)
      return {
        bin: fs.realpathSync(path.join(bin, 'postgres')).replace(/\/postgres$/, ''),
        libraryPath: null,
        origin: 'on PATH',
      }
  }
  return null
}

/** @param {string} bin */
function isComplete(bin) {
  return ['initdb', 'postgres', 'pg_ctl'].every((program) => fs.existsSync(path.join(bin, program)))
}

/** @param {string} bin */
function majorOf(bin) {
  return Number(/(\d+)\/bin/.exec(fs.realpathSync(path.join(bin, 'postgres')))?.[1] ?? 0)
}

/** @param {string} root */
function libraryPathOf(root) {
  const triplets = fs.existsSync(path.join(root, 'usr/lib'))
    ? fs.readdirSync(path.join(root, 'usr/lib')).filter((name) => name.includes('-linux-gnu'))
    : []
  return triplets
    .flatMap((triplet) => [path.join(root, 'usr/lib', triplet), path.join(root, 'lib', triplet)])
    .join(':')
}

/**
 * Installs PostgreSQL: as root with apt-get; else by unpacking Debian's packages under the data folder. Throws an error that says what to
 * install by hand where neither works.
 * @param {{ dataDir: string, say: (line: string) => void }} options
 * @returns {Promise<Binaries>}
 */
export async function installPostgres({ dataDir, say }) {
  try {
    if (process.getuid?.() === 0) {
      say('installing PostgreSQL from Debian (apt-get)')
      await installDebian(['postgresql'])
    } else {
      say('not root: unpacking Debian’s PostgreSQL under the data folder')
      await unpackDebian(dataDir)
    }
  } catch (error) {
    throw new Error(
      `PostgreSQL ${leastMajor} or newer is needed and could not be installed (${/** @type {Error} */ (error).message}).\n` +
        'Install it by hand (as root: apt-get install postgresql), or set DATABASE_URL to a database that you have, then start again.',
    )
  }
  const found = findPostgres(dataDir)
  if (!found)
    throw new Error(
      `PostgreSQL was installed but initdb and postgres of version ${leastMajor} or newer were not found under /usr/lib/postgresql.`,
    )
  return found
}

/**
 * apt-get install as root, without a service or a default cluster of PostgreSQL being started. `services` that come with the packages
 * stay off after the next start of the machine too.
 * @param {string[]} names
 * @param {{ services?: string[] }} [options]
 */
export async function installDebian(names, { services = [] } = {}) {
  const policy = '/etc/postgresql-common/createcluster.conf'
  if (names.includes('postgresql') && !fs.existsSync(policy)) {
    fs.mkdirSync(path.dirname(policy), { recursive: true })
    fs.writeFileSync(policy, 'create_main_cluster = false\n')
  }
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  const install = [
    '-y',
    '--no-install-recommends',
    '-o',
    'Dpkg::Use-Pty=0',
    '-o',
    'DPkg::Lock::Timeout=300',
    '-o',
    'Dpkg::Options::=--force-confold',
    'install',
    ...names,
  ]
  const giveBack = services.length > 0 ? forbidServices() : () => undefined
  try {
    await run('apt-get', install, { env })
  } catch {
    await run('apt-get', ['update'], { env }) // an empty or old package list is the usual cause
    await run('apt-get', install, { env })
  } finally {
    giveBack()
  }
  for (const service of services) {
    const asPackage = { ...env, DPKG_MAINTSCRIPT_PACKAGE: service.replace(/\.service$/, '') }
    await run('deb-systemd-helper', ['disable', service], { env: asPackage })
  }
}

/** While this stands, Debian's packages start no service (invoke-rc.d asks it); one that is there already is left alone. */
function forbidServices() {
  const policy = '/usr/sbin/policy-rc.d'
  if (fs.existsSync(policy)) return () => undefined
  fs.writeFileSync(policy, '#!/bin/sh\nexit 101\n', { mode: 0o755 })
  return () => fs.rmSync(policy, { force: true })
}

/** @param {string} dataDir */
async function unpackDebian(dataDir) {
  const state = path.join(dataDir, 'apt')
  const into = path.join(dataDir, 'debian')
  for (const dir of ['lists/partial', 'cache/archives/partial', 'download'])
    fs.mkdirSync(path.join(state, dir), { recursive: true })
  fs.mkdirSync(into, { recursive: true })
  const own = [
    '-o',
    `Dir::State::lists=${path.join(state, 'lists')}`,
    '-o',
    `Dir::Cache=${path.join(state, 'cache')}`,
    '-o',
    'Debug::NoLocking=1',
  ]
  await run('apt-get', [...own, 'update'], {})
  const plan = await run('apt-get', [...own, '-s', '--no-install-recommends', 'install', 'postgresql'], {})
  const names = [...plan.matchAll(/^Inst (\S+)/gm)].map((match) => /** @type {string} */ (match[1]))
  await run('apt-get', [...own, 'download', ...names], { cwd: path.join(state, 'download') })
  for (const file of fs.readdirSync(path.join(state, 'download')).filter((name) => name.endsWith('.deb'))) {
    await run('dpkg', ['-x', path.join(state, 'download', file), into], {})
  }
  fs.rmSync(state, { recursive: true, force: true })
}

/**
 * Runs a program to its end; the error carries its last lines.
 * @param {string} command
 * @param {string[]} args
 * @param {import('node:child_process').SpawnOptions} options
 * @returns {Promise<string>} standard output
 */
export function run(command, args, options) {
  return new Promise((resolve, reject) => {
    const child = spawn(command, args, { stdio: ['ignore', 'pipe', 'pipe'], ...options })
    let out = ''
    let err = ''
    child.stdout?.on('data', (chunk) => (out += chunk))
    child.stderr?.on('data', (chunk) => (err += chunk))
    child.on('error', reject)
    child.on('close', (code) => {
      if (code === 0) resolve(out)
      else
        reject(
          new Error(
            `${path.basename(command)} ${args.find((word) => !word.startsWith('-')) ?? ''} ended with ${code}: ${(err || out).trim().split('\n').slice(-3).join(' / ')}`,
          ),
        )
    })
  })
}
