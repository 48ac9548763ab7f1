import { existsSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { analyseByCommand } from '../support/truth/analyse'
import type { Answer } from '../support/truth/answer'
import { makeBuilding, type TruthBuilding } from '../support/truth/building'
import { CLASSES } from '../support/truth/classes'
import { type Judgement, judge } from '../support/truth/judge'
import { textbook } from '../support/truth/rivals/textbook'
import { toldWindow } from '../support/truth/rivals/told-window'
import { type Summary, summarise } from '../support/truth/summary'
import { printDoubts, weighDoubts } from './doubts'
import { findingsOf } from './findings'
import { options, percent, printTable, wholeNumber, writeReport } from './report'

const chosen = options({ seed: '1', rooms: '12', days: '5', class: '', keep: '', findings: '' })
const seed = wholeNumber('seed', chosen.seed, 0)
const roomsPerClass = wholeNumber('rooms', chosen.rooms, 2)
const days = wholeNumber('days', chosen.days, 1)
const names = chosen.class ? chosen.class.split(',') : Object.keys(CLASSES)
for (const name of names)
  if (!CLASSES[name]) {
    console.error(`no class "${name}"; there are: ${Object.keys(CLASSES).join(', ')}`)
    process.exit(2)
  }

const WAYS = ['Ebbmark', 'textbook', 'told window'] as const
type Way = (typeof WAYS)[number]
type JudgementsByWay = Record<Way, Judgement[]>

const folder = chosen.keep || mkdtempSync(join(tmpdir(), 'ebbmark-bench-'))
const commandIsThere = existsSync('ingest/analyse/main.ts')
if (!commandIsThere) console.log('ingest/analyse/main.ts is not there: only the rivals are scored')

async function judgeAll(building: TruthBuilding, part: number): Promise<[Record<Way, Judgement>, number]> {
  let answers: Answer[] = []
  let seconds = 0
  if (commandIsThere) {
    const run = await analyseByCommand(
      building,
      join(folder, `${building.className}-${part}`),
      chosen.keep !== '',
    )
    answers = run.answers
    seconds = run.seconds
  }
  const judged = {
    Ebbmark: judge(building, answers),
    textbook: judge(building, textbook(building)),
    'told window': judge(building, toldWindow(building)),
  }
  return [judged, seconds]
}

/** Two buildings to a class: one with an outdoor sensor, one without. */
async function runClass(className: string): Promise<[JudgementsByWay, number]> {
  const judgements = none()
  let seconds = 0
  for (const part of [0, 1]) {
    const rooms = Math.floor((roomsPerClass + part) / 2)
    const building = makeBuilding({ className, seed, part, rooms, days, outdoor: part === 0 })
    const [judged, took] = await judgeAll(building, part)
    seconds += took
    for (const way of WAYS) judgements[way].push(judged[way])
    if (chosen.findings) console.log(findingsOf(building, part, seed, judged.Ebbmark))
  }
  return [judgements, seconds]
}

const HEAD = [
  'class',
  'way',
  'ans %',
  'any %',
  'med %',
  'p90 %',
  'bias %',
  'mid %',
  'cov %',
  '± %',
  'false %',
  'gross %',
  'none',
  'night',
  'bounds',
  'outd.',
  'acc/dbt/ref',
]

function rowOf(name: string, way: Way, s: Summary): string[] {
  return [
    way === 'Ebbmark' ? name : '',
    way,
    percent(s.answeredShare, 0),
    percent(s.answeredOrBoundedShare, 0),
    percent(s.medianError),
    percent(s.p90Error),
    percent(s.bias),
    percent(s.medianErrorAll),
    percent(s.coverage, 0),
    percent(s.medianHalfWidth),
    percent(s.falseAcceptShare),
    percent(s.grossShare),
    String(s.noDecay),
    String(s.wrongNights),
    s.boundsGiven ? `${s.boundsHold}/${s.boundsGiven}` : '',
    s.outdoorGiven ? `${s.outdoorHold}/${s.outdoorGiven}` : '',
    `${s.accepted}/${s.doubtful}/${s.refused}`,
  ]
}

/** Ordinary rooms in which one well-mixed zone meets outdoor air: pooled on their own as well. */
const FIRST_SEVEN = ['clean', 'noisy', 'short', 'cleaners', 'shut-off', 'drift', 'demand']
const none = (): JudgementsByWay => ({ Ebbmark: [], textbook: [], 'told window': [] })
const all = none()
const seven = none()
const figures: Record<string, unknown> = {}
const rows: string[][] = []
let analyseSeconds = 0
for (const name of names) {
  const [judgements, seconds] = await runClass(name)
  analyseSeconds += seconds
  const summaries = Object.fromEntries(WAYS.map((way) => [way, summarise(judgements[way])]))
  figures[name] = { about: CLASSES[name]!.about, ...summaries }
  for (const way of WAYS) {
    rows.push(rowOf(name, way, summaries[way]!))
    all[way].push(...judgements[way])
    if (FIRST_SEVEN.includes(name)) seven[way].push(...judgements[way])
  }
}
const pooled = Object.fromEntries(WAYS.map((way) => [way, summarise(all[way])]))
if (seven.Ebbmark.length === 2 * FIRST_SEVEN.length)
  for (const way of WAYS) rows.push(rowOf('first seven', way, summarise(seven[way])))
for (const way of WAYS) rows.push(rowOf('all classes', way, pooled[way]!))
if (!chosen.keep) rmSync(folder, { recursive: true, force: true })

printTable(HEAD, rows)
console.log(`
ans: evenings with a real decay that got an accepted figure; any: or a doubtful one or a bound. med, p90, bias: error of the
evening's figure; mid: of all figures, mid-day ones too. cov: 95 % intervals that hold the truth; ±: median half width. false:
accepted with people inside or two rates mixed, and more than 20 % off; gross: accepted and more than 20 % off; none: accepted
where nothing decays; night: wrong local date; bounds, outd.: bounds or ranges, and outdoor ranges, that hold / were given.`)
const doubts = weighDoubts(all.Ebbmark)
console.log('\nwhat doubt holds back, in rooms without a neighbour')
printDoubts(doubts)
const ratio = (key: 'medianError' | 'p90Error') => ({
  toTextbook: pooled.Ebbmark![key] / pooled.textbook![key],
  toToldWindow: pooled.Ebbmark![key] / pooled['told window']![key],
})
writeReport('inference', {
  seed,
  roomsPerClass,
  days,
  analyseSeconds,
  ratios: { medianError: ratio('medianError'), p90Error: ratio('p90Error') },
  pooled,
  doubts,
  firstSeven: Object.fromEntries(WAYS.map((way) => [way, summarise(seven[way])])),
  classes: figures,
})
