// For the other commands: installs what is missing, then runs one program with the environment of the last start.
import { spawn } from 'node:child_process'
import fs from 'node:fs'
import path from 'node:path'
import { findPostgres } from '../db/server/binaries.mjs'
import { runningServer, startCluster } from '../db/server/cluster.mjs'
import { ensurePackages } from './stack/packages.mjs'
import { buildWebWhenStale } from './stack/web-build.mjs'

const root = path.resolve(import.meta.dirname, '..')
const dataDir = path.resolve(process.env.EBBMARK_DATA_DIR || path.join(root, '.data'))
const [command, ...words] = process.argv.slice(2)

try {
  await ensurePackages(root)
  if (command === 'build')
    await buildWebWhenStale({ root, distDir: '.next', say: (line) => process.stderr.write(`${line}\n`) })
  else if (command === 'run') process.exitCode = await runProgram(words)
  else throw new Error('usage: prepare.mjs build | run [--database] program.ts …')
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
  process.exitCode = 2
}

/** @param {string[]} words */
async function runProgram(words) {
  const needsDatabase = words[0] === '--database'
  const [program, ...args] = needsDatabase ? words.slice(1) : words
  const started = needsDatabase && !process.env.DATABASE_URL ? await wakeDatabase() : null
  const code = await spawned(/** @type {string} */ (program), args)
  await started?.stop()
  return code
}

/** The database of the last start: used where it runs, started for this command where it does not. */
async function wakeDatabase() {
  const dir = path.join(dataDir, 'postgres')
  if (!fs.existsSync(path.join(dataDir, 'environment.json'))) {
    throw new Error(`There is no database under ${dataDir} yet: run npm start once, or set DATABASE_URL.`)
  }
  if (runningServer(dir)) return null
  const binaries = findPostgres(dataDir)
  if (!binaries) throw new Error('PostgreSQL is not installed: run npm start, which installs it.')
  const { DATABASE_URL } = JSON.parse(fs.readFileSync(path.join(dataDir, 'environment.json'), 'utf8'))
  return startCluster({
    binaries,
    dir,
    port: Number(new URL(DATABASE_URL).port),
    logFile: path.join(dataDir, 'log', 'postgres.log'),
  })
}

/** @param {string} program @param {string[]} args @returns {Promise<number>} */
function spawned(program, args) {
  const file = path.join(dataDir, 'environment.json')
  const remembered = fs.existsSync(file) ? JSON.parse(fs.readFileSync(file, 'utf8')) : {}
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, ['--import', 'tsx', program, ...args], {
      cwd: root,
      env: { ...remembered, LOG_LEVEL: 'warn', ...process.env },
      stdio: 'inherit',
    })
    for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM']))
      process.on(signal, () => child.kill(signal))
    child.on('error', reject)
    child.on('close', (code, signal) => resolve(code ?? (signal ? 130 : 1)))
  })
}
