import { dataDir } from '@/lib/server/env'
import { readBirth } from './demo-files'
import { exportDemo } from './export-files'
import { askedOf, usage } from './export-options'
import { sallowMill } from './scenario'
import { makeWorld } from './world'

try {
  const options = askedOf(process.argv.slice(2), readBirth(dataDir()), Date.now())
  const world = makeWorld(sallowMill, options)
  const counts = await exportDemo(world, options.out, options.untilS)
  const span = `${new Date(world.historyStartS * 1000).toISOString()} to ${new Date(options.untilS * 1000).toISOString()}`
  process.stdout.write(
    `${counts.readings} readings of ${counts.rooms} rooms and landings, ${counts.outdoor} outdoor, ${span}, in ${options.out}\n`,
  )
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n${usage}\n`)
  process.exitCode = 2
}
