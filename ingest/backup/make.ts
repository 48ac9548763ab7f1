import { createHash } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'
import { pipeline } from 'node:stream/promises'
import { dataFiles } from './data-files'
import { Mistake, runPostgres, tar } from './programs'

export const MANIFEST = 'ebbmark-backup.json'
export const DUMP = 'database.dump'
export const DATA = 'data'

/** What a backup says of itself; `version` changes when an older restore could not read it. */
export type Manifest = { version: 1; madeAt: string; dumpSha256: string; files: string[] }

export type BackupOptions = { ownerUrl: string; dataDir: string; out: string; now: Date }

/**
 * Writes database (one snapshot, pg_dump's custom format) and data files into one tar, readable by its owner only; the file has its name
 * only when it is whole. Ebbmark may run meanwhile.
 */
export async function makeBackup({ ownerUrl, dataDir, out, now }: BackupOptions): Promise<Manifest> {
  if (fs.existsSync(out)) throw new Mistake(`--out ${out}: there is a file of this name; give another one`)
  const folder = path.dirname(path.resolve(out))
  if (!fs.existsSync(folder)) throw new Mistake(`--out ${out}: there is no folder ${folder}; make it first`)
  const stage = fs.mkdtempSync(path.join(folder, '.ebbmark-backup-'))
  const partial = path.join(stage, 'backup.tar')
  try {
    const dump = path.join(stage, DUMP)
    await runPostgres('pg_dump', {
      ...{ url: ownerUrl, dataDir },
      args: ['--format=custom', '--no-owner', '--compress=6', '--file', dump],
    })
    const files = dataFiles(dataDir)
    const manifest: Manifest = {
      version: 1,
      madeAt: now.toISOString(),
      dumpSha256: await sha256(dump),
      files,
    }
    fs.writeFileSync(path.join(stage, MANIFEST), JSON.stringify(manifest, null, 2))
    fs.writeFileSync(partial, '', { mode: 0o600 })
    const list = path.join(stage, 'files')
    fs.writeFileSync(list, files.map((file) => `./${file}\0`).join(''))
    const named = ['--null', '--verbatim-files-from', '--no-recursion', `--transform=s,^\\./,${DATA}/,`]
    const data = files.length > 0 ? ['-C', path.resolve(dataDir), ...named, '--files-from', list] : []
    await tar(['-cf', partial, '-C', stage, MANIFEST, DUMP, ...data])
    const handle = fs.openSync(partial, 'r')
    fs.fsyncSync(handle)
    fs.closeSync(handle)
    fs.renameSync(partial, out)
    return manifest
  } finally {
    fs.rmSync(stage, { recursive: true, force: true })
  }
}

/** SHA-256 of a file, hexadecimal. */
export async function sha256(file: string): Promise<string> {
  const hash = createHash('sha256')
  await pipeline(fs.createReadStream(file), hash)
  return hash.digest('hex')
}
