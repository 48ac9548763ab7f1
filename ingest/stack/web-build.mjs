// Builds the web application only when its sources changed since the last build.
import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'

const sources = [
  'app',
  'components',
  'lib',
  'db',
  'public',
  'package-lock.json',
  'next.config.mjs',
  'tailwind.config.ts',
  'postcss.config.mjs',
  'tsconfig.json',
  'instrumentation.ts',
  'proxy.ts',
]

/**
 * @param {{ root: string, distDir: string, say: (line: string) => void }} options
 * @returns {Promise<boolean>} true when it was built, false when the build at hand is fresh
 */
export async function buildWebWhenStale({ root, distDir, say }) {
  const marker = path.join(root, distDir, 'ebbmark-sources')
  const wanted = hashOf(root)
  if (fs.existsSync(marker) && fs.readFileSync(marker, 'utf8') === wanted) return false
  await build(root, distDir, say)
  fs.writeFileSync(marker, wanted)
  return true
}

/** @param {string} root */
function hashOf(root) {
  const hash = createHash('sha256')
  for (const file of sources.flatMap((name) => filesOf(path.join(root, name))).sort()) {
    hash.update(path.relative(root, file)).update('\0').update(fs.readFileSync(file)).update('\0')
  }
  return hash.digest('hex')
}

/** @param {string} at @returns {string[]} */
function filesOf(at) {
  if (!fs.existsSync(at)) return []
  if (!fs.statSync(at).isDirectory()) return [at]
  return fs.readdirSync(at).flatMap((name) => filesOf(path.join(at, name)))
}

/** @param {string} root @param {string} distDir @param {(line: string) => void} say */
function build(root, distDir, say) {
  return new Promise((resolve, reject) => {
    let said = ''
    const child = spawn(process.execPath, [path.join(root, 'node_modules/next/dist/bin/next'), 'build'], {
      cwd: root,
      env: { ...process.env, NODE_ENV: 'production', NEXT_TELEMETRY_DISABLED: '1', NEXT_DIST_DIR: distDir },
      stdio: ['ignore', 'pipe', 'pipe'],
    })
    for (const stream of [child.stdout, child.stderr]) stream.on('data', (chunk) => (said += chunk))
    child.on('error', reject)
    child.on('close', (code) => {
      if (code === 0) return resolve(undefined)
      say(said.trim().split('\n').slice(-40).join('\n'))
      reject(
        new Error(
          `the web application did not build (next build ended with ${code}; its last lines are above)`,
        ),
      )
    })
  })
}
