import { spawn } from 'node:child_process'
import fs from 'node:fs'
import path from 'node:path'
import { findPostgres } from '@/db/server/binaries.mjs'

/** What the person who typed can mend: told in one line, exit 2. */
export class Mistake extends Error {}

/**
 * Runs a program of PostgreSQL's own folder (never one that happens to be on PATH) against a database. The password goes by the
 * environment, because arguments can be read by everyone on the machine.
 * @throws Error with the program's last words
 */
export async function runPostgres(
  program: 'pg_dump' | 'pg_restore',
  { url, dataDir, args }: { url: string; dataDir: string; args: readonly string[] },
): Promise<void> {
  const binaries = findPostgres(dataDir)
  const file = binaries && path.join(binaries.bin, program)
  if (!binaries || !file || !fs.existsSync(file))
    throw new Mistake(
      `${program} was not found under /usr/lib/postgresql: install Debian's postgresql-client, of the server's version or newer.`,
    )
  const at = new URL(url)
  const connection = [
    '--host',
    at.hostname,
    '--port',
    at.port || '5432',
    '--username',
    decodeURIComponent(at.username),
  ]
  const database = decodeURIComponent(at.pathname.slice(1))
  await run(file, [...connection, '--no-password', '--dbname', database, ...args], {
    PGPASSWORD: decodeURIComponent(at.password),
    PGSSLMODE: at.searchParams.get('sslmode') ?? 'prefer',
    ...(binaries.libraryPath ? { LD_LIBRARY_PATH: binaries.libraryPath } : {}),
  })
}

/** Debian's tar, which is always there. */
export const tar = (args: readonly string[]) => run('tar', args, {})

function run(command: string, args: readonly string[], env: Record<string, string>): Promise<void> {
  return new Promise((resolve, reject) => {
    // an environment of its own, so that no PG… variable of the caller leads it elsewhere
    const child = spawn(command, args, {
      stdio: ['ignore', 'ignore', 'pipe'],
      env: { NODE_ENV: 'production', PATH: '/usr/local/bin:/usr/bin:/bin', LC_ALL: 'C.UTF-8', ...env },
    })
    let said = ''
    child.stderr.on('data', (chunk) => (said = `${said}${chunk}`.slice(-4000)))
    child.on('error', reject)
    child.on('close', (code) => {
      if (code === 0) resolve()
      else
        reject(
          new Error(
            `${path.basename(command)} ended with ${code}: ${said.trim().split('\n').slice(-3).join(' / ')}`,
          ),
        )
    })
  })
}
