import { readdirSync, readFileSync } from 'node:fs'
import path from 'node:path'

const app = path.join(process.cwd(), 'app')

/** Every file below app/, as paths relative to it. */
function files(dir = app): string[] {
  return readdirSync(dir, { withFileTypes: true })
    .flatMap((entry) => {
      const at = path.join(dir, entry.name)
      return entry.isDirectory() ? files(at) : [path.relative(app, at)]
    })
    .sort()
}

/** The address of a page or handler: its folder without the groups in brackets. */
export function addressOf(file: string): string {
  const parts = path.dirname(file).split(path.sep)
  return `/${parts.filter((part) => part !== '.' && !/^\(.*\)$/.test(part)).join('/')}`
}

/** Addresses of all pages, with [params] as in the folders. */
export function pagesOfApp(): string[] {
  return files()
    .filter((file) => path.basename(file) === 'page.tsx')
    .map(addressOf)
}

/** "METHOD /address" of all route handlers. */
export function routesOfApp(): string[] {
  return files()
    .filter((file) => path.basename(file) === 'route.ts')
    .flatMap((file) => {
      const text = readFileSync(path.join(app, file), 'utf8')
      const methods = text.match(/\b(GET|HEAD|POST|PUT|PATCH|DELETE)\b(?=\s*(=|,|\}|\())/g) ?? []
      return [...new Set(methods)].map((method) => `${method} ${addressOf(file)}`)
    })
}

/** "file#name" of everything that a file marked 'use server' exports. */
export function actionsOfApp(): string[] {
  return files()
    .filter((file) => /\.tsx?$/.test(file))
    .flatMap((file) => {
      const text = readFileSync(path.join(app, file), 'utf8')
      if (!/^\s*['"]use server['"]/m.test(text)) return []
      const names = text.matchAll(/^export (?:async function|const) (\w+)/gm)
      return [...names].map(([, name]) => `${file}#${name}`)
    })
}

type Manifest = { node: Record<string, { exportedName: string; filename: string; workers: object }> }

export type BuiltAction = { id: string; key: string; page: string }

/** The actions that the build knows, with the id a browser calls them by and a page that carries them. */
export function builtActions(distDir: string): BuiltAction[] {
  const file = path.join(process.cwd(), distDir, 'server/server-reference-manifest.json')
  const { node } = JSON.parse(readFileSync(file, 'utf8')) as Manifest
  return Object.entries(node).map(([id, { exportedName, filename, workers }]) => {
    const worker = Object.keys(workers)[0] ?? ''
    return {
      id,
      key: `${filename.replace(/^app\//, '')}#${exportedName}`,
      page: addressOf(worker.replace(/^app\//, '')),
    }
  })
}
