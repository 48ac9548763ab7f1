/** npm run restore -- --from FILE: a backup into an empty database, or a new one. */
import { parseArgs } from 'node:util'
import { systemClock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'
import { Mistake } from './programs'
import { type RestoreOptions, restoreBackup } from './take-back'

const USAGE = `usage: npm run restore -- --from FILE [--replace | --force-into NAME]
  --from        a tar that npm run backup wrote
  --replace     put it in the place of the database in use, which is kept under another name (stop Ebbmark first)
  --force-into  make a new database of this name for it`

async function main(argv: string[]): Promise<void> {
  const { from, into } = argumentsOf(argv)
  const { DATABASE_OWNER_URL, DATABASE_DIRECT_URL, DATABASE_URL, EBBMARK_DATA_DIR } = env()
  const ownerUrl = DATABASE_OWNER_URL ?? DATABASE_DIRECT_URL ?? DATABASE_URL
  const restored = await restoreBackup({
    ...{ ownerUrl, dataDir: EBBMARK_DATA_DIR, from, into, now: systemClock.now() },
  })
  const { manifest, database, keptDatabase, keptFiles } = restored
  process.stdout.write(`The backup of ${manifest.madeAt} is in the database ${database}.\n`)
  if (keptDatabase) process.stdout.write(`What was there is kept in the database ${keptDatabase}.\n`)
  if (keptFiles.length > 0)
    process.stdout.write(
      `Data files that differed are kept beside the restored ones: ${keptFiles.join(', ')}\n`,
    )
  process.stdout.write('Everyone signs in again. The next npm start brings it to the newest schema.\n')
}

function argumentsOf(argv: string[]): Pick<RestoreOptions, 'from' | 'into'> {
  const options = {
    from: { type: 'string' },
    replace: { type: 'boolean' },
    'force-into': { type: 'string' },
  } as const
  try {
    const { values } = parseArgs({ args: argv, options, allowPositionals: false })
    const { from, replace, 'force-into': newDatabase } = values
    if (!from) throw new Mistake('--from is needed')
    if (replace && newDatabase) throw new Mistake('--replace and --force-into exclude each other')
    return { from, into: replace ? 'replace' : newDatabase ? { newDatabase } : 'itself' }
  } catch (error) {
    throw new Mistake(`${(error as Error).message}\n${USAGE}`)
  }
}

main(process.argv.slice(2)).catch((error) => {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
  process.exitCode = error instanceof Mistake ? 2 : 1
})
