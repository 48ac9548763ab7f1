import { cpus } from 'node:os'
import { quantile } from '../support/truth/summary'
import { options, percent, printTable, wholeNumber, writeReport } from './report'
import { analyseFilesAtLength, type FileRun } from './speed/file-run'
import { compareFits } from './speed/fits'
import { bulk, cpuMsOf, oneMinuteRoomDays, refitMs } from './speed/room-days'

const chosen = options({ seed: '1', 'room-days': '10000', files: '700' })
const seed = wholeNumber('seed', chosen.seed, 0)
const many = wholeNumber('room-days', chosen['room-days'], 100)
const inFiles = wholeNumber('files', chosen.files, 0)
const few = Math.round(many / 10)

console.log(`${cpus()[0]?.model ?? 'unknown processor'}, Node ${process.version}`)
const days = oneMinuteRoomDays(seed, 2, 10)
for (const day of days.slice(0, 60)) cpuMsOf(day)
const cpuMs = days.map(cpuMsOf)
const perRoomDay = { median: quantile(cpuMs, 0.5), p95: quantile(cpuMs, 0.95), most: Math.max(...cpuMs) }
refitMs(days, 200)
const refits = refitMs(days, 600)
const refit = { median: quantile(refits, 0.5), p95: quantile(refits, 0.95), most: Math.max(...refits) }
const cells = (t: typeof refit) => [t.median.toFixed(2), t.p95.toFixed(2), t.most.toFixed(2)]
console.log(`\none-minute steps (${days.length} different room-days; CPU time, the refit by the clock)`)
printTable(
  ['', 'median ms', '95 % ms', 'most ms'],
  [
    ['one room-day, whole analysis', ...cells(perRoomDay)],
    ['one refit of a dragged window', ...cells(refit)],
  ],
)

globalThis.gc?.()
const small = bulk(days, few)
globalThis.gc?.()
const large = bulk(days, many)
const growth = large.cpuSeconds / small.cpuSeconds / (many / few)
console.log('\nmany room-days, one after the other')
printTable(
  ['room-days', 'seconds', 'CPU s', 'decays', 'peak memory MB'],
  [small, large].map((b) => [
    String(b.roomDays),
    b.seconds.toFixed(2),
    b.cpuSeconds.toFixed(2),
    String(b.decays),
    b.peakMb.toFixed(0),
  ]),
)
console.log(`time grew ${growth.toFixed(2)} times as much as the number of room-days (1 is linear)`)

const fileRuns: FileRun[] = []
for (const roomDays of inFiles > 0 ? [Math.round(inFiles / 4), inFiles] : [])
  fileRuns.push(await analyseFilesAtLength(roomDays))
if (fileRuns.length > 0) {
  console.log('\nthe analyse command on files of one-minute readings (--files sets how many room-days)')
  printTable(
    ['room-days', 'file MB', 'seconds', 'decays', 'peak memory MB'],
    fileRuns.map((f) => [
      String(f.roomDays),
      f.fileMb.toFixed(0),
      f.seconds.toFixed(1),
      String(f.decays),
      f.peakMb.toFixed(0),
    ]),
  )
}

const fits = compareFits(seed)
const own = fits[0]!
console.log('\nfits of C = B + E exp(−A t), 120 readings, three unknowns, the same start')
printTable(
  ['program', 'fits/s', 'of Ebbmark', 'rate differs by at most', 'failed'],
  fits.map((f) => [
    f.name,
    f.fitsPerSecond.toFixed(0),
    (f.fitsPerSecond / own.fitsPerSecond).toFixed(3),
    `${percent(f.largestDifference, 5)} %`,
    String(f.failures),
  ]),
)
if (fits.length < 3) console.log('SciPy is not installed (Debian: python3-scipy): left out')
writeReport('speed', {
  node: process.version,
  perRoomDayMs: perRoomDay,
  small,
  large,
  growth,
  fileRuns,
  fits,
})
