import fs from 'node:fs'
import path from 'node:path'
import { pipeline } from 'node:stream/promises'
import { createGunzip, createGzip } from 'node:zlib'
import type { Database } from '@/db/client'
import { countDetached, streamDetached } from '@/db/queries/retention'

/**
 * Writes a detached month as compressed CSV into `folder` and reads it back: the file stands under its final name only when it holds every
 * row. Returns its name. Throws an error that names the file where it does not.
 */
export async function archiveMonth(database: Database, folder: string, partition: string): Promise<string> {
  fs.mkdirSync(folder, { recursive: true, mode: 0o750 })
  const month = partition.slice(-7).replace('_', '-')
  const partial = path.join(folder, `readings-${month}.partial`)
  const rows = await database.asSystemRaw('archive', async (client) => {
    await pipeline(
      streamDetached(client, partition),
      createGzip({ level: 6 }),
      fs.createWriteStream(partial, { mode: 0o640, flush: true }),
    )
    return countDetached(client, partition)
  })
  const written = (await countLines(partial)) - 1
  if (written !== rows)
    throw new Error(
      `${partial} holds ${written} of ${rows} readings: the month stays in the database; is the disk full?`,
    )
  const name = freeName(folder, `readings-${month}`)
  fs.renameSync(partial, path.join(folder, name))
  return name
}

/** A month that was archived before and had stragglers since gets a second file. */
function freeName(folder: string, stem: string): string {
  for (let part = 1; ; part++) {
    const name = `${stem}${part === 1 ? '' : `-${part}`}.csv.gz`
    if (!fs.existsSync(path.join(folder, name))) return name
  }
}

async function countLines(file: string): Promise<number> {
  let lines = 0
  await pipeline(fs.createReadStream(file), createGunzip(), async (source: AsyncIterable<Buffer>) => {
    for await (const chunk of source) for (const byte of chunk) if (byte === 10) lines++
  })
  return lines
}
