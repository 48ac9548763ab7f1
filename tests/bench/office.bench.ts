import { existsSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { analyseByCommand } from '../support/truth/analyse'
import { makeBuilding } from '../support/truth/building'
import { judge } from '../support/truth/judge'
import { STORIES } from '../support/truth/office'
import { scoreOffice } from '../support/truth/office-score'
import { textbook } from '../support/truth/rivals/textbook'
import { findingsOf } from './findings'
import { options, printTable, wholeNumber, writeReport } from './report'

const chosen = options({ seed: '1', days: '5', findings: '', keep: '' })
const seed = wholeNumber('seed', chosen.seed, 0)
const days = wholeNumber('days', chosen.days, 1)
const rooms = Object.keys(STORIES).length
const folder = chosen.keep || mkdtempSync(join(tmpdir(), 'ebbmark-bench-'))
const commandIsThere = existsSync('ingest/analyse/main.ts')
if (!commandIsThere) console.log('ingest/analyse/main.ts is not there: only the rival is scored')

const figures: Record<string, unknown> = {}
for (const outdoor of [true, false]) {
  const building = makeBuilding({ className: 'office', seed, part: outdoor ? 0 : 1, rooms, days, outdoor })
  const run = commandIsThere
    ? await analyseByCommand(building, join(folder, `office-${outdoor}`), chosen.keep !== '')
    : null
  const own = judge(building, run?.answers ?? [])
  const rival = scoreOffice(building, judge(building, textbook(building)))
  const scores = scoreOffice(building, own)
  console.log(`\n${outdoor ? 'with' : 'without'} an outdoor sensor, ${days} evenings of each`)
  printTable(
    [
      'story',
      'a careful analyst',
      'right',
      'wrong',
      'doubtful',
      'silent',
      'as it should',
      'textbook right',
      'wrong',
    ],
    scores.map((s, i) => {
      const other = rival[i]!
      const cells = [s.right, s.wrong, s.doubtful, s.silent].map(String)
      return [
        s.story,
        s.words,
        ...cells,
        `${s.asItShould}/${s.evenings}`,
        String(other.right),
        String(other.wrong),
      ]
    }),
  )
  if (chosen.findings) console.log(findingsOf(building, outdoor ? 0 : 1, seed, own))
  figures[outdoor ? 'withOutdoor' : 'withoutOutdoor'] = { ebbmark: scores, textbook: rival }
}
if (!chosen.keep) rmSync(folder, { recursive: true, force: true })
console.log(`
right, wrong: evenings with an accepted figure within, or any accepted figure beyond, 20 % of the truth in its own window;
doubtful: only doubtful ones; silent: nothing or refused. as it should: evenings that came out as the analyst would have them.`)
writeReport('office', { seed, days, ...figures })
