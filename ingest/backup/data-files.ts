import fs from 'node:fs'
import path from 'node:path'

/** Of the data folder, what another machine has of its own or makes again; all else goes along, also what later versions add. */
const LEFT_OUT = new Set([
  'backups',
  'postgres',
  'debian',
  'apt',
  'log',
  'mailbox',
  'environment.json',
  'secrets.json',
  'start.sock',
])

/** Relative paths of the files of a data folder that belong to a backup, sorted. */
export function dataFiles(dataDir: string): string[] {
  if (!fs.existsSync(dataDir)) return []
  const walk = (at: string): string[] =>
    fs.readdirSync(path.join(dataDir, at), { withFileTypes: true }).flatMap((entry) => {
      const relative = path.join(at, entry.name)
      if (entry.isDirectory()) return walk(relative)
      return entry.isFile() && !/\.(partial|new|sock|pid|lock)$/.test(entry.name) ? [relative] : []
    })
  return fs
    .readdirSync(dataDir, { withFileTypes: true })
    .filter((entry) => !LEFT_OUT.has(entry.name) && !/^\.ebbmark-|\.tar$/.test(entry.name))
    .flatMap((entry) =>
      entry.isDirectory()
        ? walk(entry.name)
        : entry.isFile() && !/\.(partial|new|sock|pid|lock|pw)$/.test(entry.name)
          ? [entry.name]
          : [],
    )
    .sort()
}

/**
 * Puts files of a backup into a data folder. One that is there with another content is kept beside, with `suffix` added to its name.
 * Returns the names that were kept so.
 */
export function putDataFiles(from: string, dataDir: string, suffix: string): string[] {
  const kept: string[] = []
  for (const file of dataFiles(from)) {
    const target = path.join(dataDir, file)
    const source = path.join(from, file)
    if (fs.existsSync(target)) {
      if (fs.readFileSync(target).equals(fs.readFileSync(source))) continue
      fs.renameSync(target, `${target}${suffix}`)
      kept.push(file)
    }
    fs.mkdirSync(path.dirname(target), { recursive: true })
    fs.copyFileSync(source, target)
    fs.chmodSync(target, fs.statSync(source).mode & 0o777)
  }
  return kept
}
