/** npm run backup -- --out FILE: database and data files as one tar. */
import fs from 'node:fs'
import { parseArgs } from 'node:util'
import { systemClock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'
import { makeBackup } from './make'
import { Mistake } from './programs'

const USAGE = `usage: npm run backup -- --out FILE
  --out  the tar to write; it holds password hashes and keys, so keep it where only you can read it`

async function main(argv: string[]): Promise<void> {
  const { out } = argumentsOf(argv)
  const { DATABASE_OWNER_URL, DATABASE_DIRECT_URL, DATABASE_URL, EBBMARK_DATA_DIR } = env()
  const ownerUrl = DATABASE_OWNER_URL ?? DATABASE_DIRECT_URL ?? DATABASE_URL
  const began = performance.now()
  const manifest = await makeBackup({ ownerUrl, dataDir: EBBMARK_DATA_DIR, out, now: systemClock.now() })
  const megabytes = (fs.statSync(out).size / 1e6).toFixed(1)
  const seconds = ((performance.now() - began) / 1000).toFixed(1)
  process.stdout.write(`${out}: database and ${manifest.files.length} files, ${megabytes} MB, ${seconds} s\n`)
}

function argumentsOf(argv: string[]): { out: string } {
  try {
    const { values } = parseArgs({
      args: argv,
      options: { out: { type: 'string' } },
      allowPositionals: false,
    })
    if (values.out) return { out: values.out }
  } catch (error) {
    throw new Mistake(`${(error as Error).message}\n${USAGE}`)
  }
  throw new Mistake(`--out is needed\n${USAGE}`)
}

main(process.argv.slice(2)).catch((error) => {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
  process.exitCode = error instanceof Mistake ? 2 : 1
})
