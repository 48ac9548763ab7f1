// `npm run bench [-- name] [-- options]`: runs one benchmark, or each in turn. Plain Node: works before anything is installed.
import { spawnSync } from 'node:child_process'
import { existsSync, readdirSync } from 'node:fs'
import { dirname, join, resolve } from 'node:path'
import { fileURLToPath } from 'node:url'

const here = dirname(fileURLToPath(import.meta.url))
const root = resolve(here, '../..')
const benches = readdirSync(here)
  .filter((file) => file.endsWith('.bench.ts'))
  .map((file) => file.replace('.bench.ts', ''))
  .sort()

const words = process.argv.slice(2).filter((word) => word !== '--')
const name = words[0] && !words[0].startsWith('-') ? words.shift() : null
if (words.includes('--help') || (name && !benches.includes(name))) {
  if (name && !benches.includes(name)) console.error(`There is no benchmark "${name}".`)
  console.error(`npm run bench [-- name] [-- options]\nBenchmarks: ${benches.join(', ')}`)
  process.exit(words.includes('--help') ? 0 : 2)
}

function run(args) {
  const done = spawnSync(process.execPath, args, { cwd: root, stdio: 'inherit' })
  return done.status ?? 1
}

if (!existsSync(join(root, 'node_modules/tsx'))) {
  const npm = spawnSync('npm', ['ci', '--no-audit', '--no-fund'], { cwd: root, stdio: 'inherit' })
  if (npm.status !== 0) process.exit(npm.status ?? 1)
}

let worst = 0
for (const bench of name ? [name] : benches) {
  console.log(`\n== ${bench} ==`)
  worst = Math.max(worst, run(['--import', 'tsx', '--expose-gc', join(here, `${bench}.bench.ts`), ...words]))
}
process.exit(worst)
