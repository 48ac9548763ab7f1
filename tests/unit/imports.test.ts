import fs from 'node:fs'
import path from 'node:path'
import { expect, it } from 'vitest'

const root = process.cwd()

/** The import table of DEVELOPERS.md: for files under `folder` (the longest match counts), which local folders and packages they may import. */
const table: { folder: string; local: RegExp; never: RegExp }[] = [
  { folder: 'lib/math', local: /^lib\/math/, never: /^(?!simple-statistics$)/ },
  { folder: 'lib/units', local: /^lib\/(math|units|time|errors|paths)/, never: /./ },
  { folder: 'lib/time', local: /^lib\/(math|units|errors|paths)/, never: /^(?!date-fns)/ },
  { folder: 'lib/errors', local: /^lib\/(math|units)/, never: /./ },
  { folder: 'lib/paths', local: /^lib\/(math|units|errors)/, never: /./ },
  { folder: 'lib/air', local: /^lib\/(air|math|units|time|errors)/, never: /^(?!simple-statistics$)/ },
  { folder: 'lib/alarms', local: /^lib\/(alarms|math|units|time|errors)/, never: /^(?!simple-statistics$)/ },
  ...['wire', 'forms', 'policy', 'format'].map((name) => ({
    folder: `lib/${name}`,
    local: /^lib\/(?!server)/,
    never: /^(node:|next|react|pg$|drizzle|pino|mqtt|aedes)/,
  })),
  { folder: 'db', local: /^(db|lib\/(?!server))/, never: /^(next|react|aedes|mqtt)/ },
  { folder: 'lib/server', local: /^(db|lib)\//, never: /^(next(?!-auth)|aedes|mqtt)/ },
  { folder: 'lib/server/mqtt', local: /^lib\//, never: /^(next|aedes|mqtt$)/ },
  { folder: 'lib/server/http', local: /^(db|lib)\//, never: /^(aedes|mqtt)/ },
  {
    folder: 'components',
    local: /^(lib\/(?!server)|components)/,
    never: /^(node:|pg$|drizzle|pino|aedes|mqtt)/,
  },
  { folder: 'ingest', local: /^(ingest|db|lib\/(?!server\/http))/, never: /^next/ },
  { folder: 'ingest/simulator', local: /^(ingest\/simulator|db|lib\/(?!server\/http|air))/, never: /^next/ },
  { folder: 'app', local: /^(app|components|db|lib)\//, never: /^(aedes|mqtt)/ },
]

/** A subject of components draws from the shared folders and from itself, never from another subject. */
const sharedComponents = /^components\/(ui|charts|live|layout)(\/|$)/

function sourceFiles(at: string): string[] {
  if (!fs.existsSync(at)) return []
  return fs.readdirSync(at, { withFileTypes: true }).flatMap((entry) => {
    const full = path.join(at, entry.name)
    if (entry.isDirectory()) return sourceFiles(full)
    return /\.(ts|tsx|mjs)$/.test(entry.name) ? [full] : []
  })
}

function importsOf(file: string): string[] {
  const text = fs.readFileSync(file, 'utf8')
  return [...text.matchAll(/(?:from|import)\s*\(?\s*'([^']+)'/g)].map((match) => match[1] as string)
}

/** Repository path of a local import, or null for a package. */
function localTarget(file: string, specifier: string): string | null {
  if (specifier.startsWith('@/')) return specifier.slice(2)
  if (specifier.startsWith('.')) return path.relative(root, path.resolve(path.dirname(file), specifier))
  return null
}

function violations(): string[] {
  const found: string[] = []
  for (const file of ['lib', 'db', 'components', 'ingest', 'app'].flatMap((folder) =>
    sourceFiles(path.join(root, folder)),
  )) {
    const name = path.relative(root, file)
    const rule = table
      .filter(({ folder }) => name.startsWith(folder))
      .sort((a, b) => b.folder.length - a.folder.length)[0]
    if (!rule) continue
    for (const specifier of importsOf(file)) {
      const target = localTarget(file, specifier)
      if (target === null ? rule.never.test(specifier) : !rule.local.test(target))
        found.push(`${name} imports ${specifier}`)
      if (target && name.startsWith('components/') && target.startsWith('components/')) {
        const subject = name.split('/')[1]
        if (!sharedComponents.test(target) && target.split('/')[1] !== subject)
          found.push(`${name} imports another subject: ${specifier}`)
        if (sharedComponents.test(name) && !sharedComponents.test(target))
          found.push(`${name} is shared and imports a subject: ${specifier}`)
      }
    }
  }
  return found
}

it('keeps the import table', () => {
  expect(violations()).toEqual([])
})

it('reads the sources it judges', () => {
  expect(sourceFiles(path.join(root, 'lib')).length).toBeGreaterThan(20)
  expect(importsOf(path.join(root, 'db/client.ts'))).toContain('@/lib/policy/scope')
})
