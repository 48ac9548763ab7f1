/** npm run nightly -- --building SLUG --date YYYY-MM-DD: one building's analysis of one local day, now. */
import { parseArgs } from 'node:util'
import { listBuildings } from '@/db/queries/building-plan'
import { systemClock } from '@/lib/server/clock'
import { database } from '@/lib/server/database'
import { localDate } from '@/lib/time'
import { analyseHistory } from './analysis/history'
import { nightWindow } from './analysis/window'
import { judgeWeeks } from './judge/judge'

const USAGE = `usage: npm run nightly -- --building BUILDING --date YYYY-MM-DD
  --building  the building's short name as in its MQTT topics, e.g. sallow-mill
  --date      building-local date; its decays are those that start on it`

/** What the person who typed can mend: told in one line, exit 2. */
class Mistake extends Error {}

function argumentsOf(argv: string[]): { slug: string; date: string } {
  const options = { building: { type: 'string' }, date: { type: 'string' } } as const
  try {
    const { values } = parseArgs({ args: argv, options, allowPositionals: false })
    if (!values.building || !values.date) throw new Mistake(`--building and --date are both needed\n${USAGE}`)
    return { slug: values.building, date: values.date }
  } catch (error) {
    throw error instanceof Mistake ? error : new Mistake(`${(error as Error).message}\n${USAGE}`)
  }
}

async function buildingOf(slug: string) {
  const buildings = await database().asSystem('nightly command', (tx) => listBuildings(tx))
  const found = buildings.find((building) => building.slug === slug)
  if (found) return found
  const known = buildings.map((building) => building.slug).join(', ')
  throw new Mistake(`--building ${slug}: there is no such building; known are: ${known || 'none yet'}`)
}

async function main(argv: string[]): Promise<void> {
  const { slug, date } = argumentsOf(argv)
  const { id: buildingId, timeZone } = await buildingOf(slug)
  try {
    nightWindow(date, timeZone)
  } catch (error) {
    throw new Mistake(`--date ${date}: ${(error as Error).message}`)
  }
  const today = localDate(systemClock.now().getTime() / 1000, timeZone)
  if (date > today)
    throw new Mistake(`--date ${date}: that day has not come yet (today is ${today} in ${timeZone})`)
  const span = { database: database(), clock: systemClock, buildingId, fromDate: date, toDate: date }
  const result = await analyseHistory(span)
  const { weeks, rowsChanged } = await judgeWeeks(span)
  process.stdout.write(
    result.changed.length === 0
      ? `${slug}, ${date}: analysed again from the same readings, nothing changed\n`
      : `${slug}, ${date}: ${result.decaysAdded} decays added\n`,
  )
  process.stdout.write(`weeks judged: ${weeks.join(', ') || 'none'}; ${rowsChanged} rows changed\n`)
}

main(process.argv.slice(2))
  .catch((error) => {
    process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
    process.exitCode = error instanceof Mistake ? 2 : 1
  })
  .finally(() => database().close())
