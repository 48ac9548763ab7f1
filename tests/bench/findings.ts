import type { TruthBuilding } from '../support/truth/building'
import { isoZ } from '../support/truth/calendar'
import type { Judgement, Verdict } from '../support/truth/judge'

const clock = (tS: number) => isoZ(tS).slice(5, 16).replace('T', ' ')

function lineOf(where: string, v: Verdict, why: string): string {
  const { answer: a, truth: t } = v
  const said = `${a.kind} ${a.ach?.toFixed(3) ?? '–'} [${a.ach_low?.toFixed(3)}, ${a.ach_high?.toFixed(3)}] B ${a.background_ppm?.toFixed(0)}`
  const really = `true ${t.outdoorPerHour.toFixed(3)} total ${t.totalPerHour.toFixed(3)} range ${t.lowestPerHour.toFixed(2)}–${t.highestPerHour.toFixed(2)} people ${t.peopleMinutes} min E0 ${t.startExcessPpm.toFixed(0)}`
  const window = `${clock(Date.parse(a.start) / 1000)}–${clock(Date.parse(a.end) / 1000)}`
  return `${why.padEnd(9)} ${where} ${v.room.id} ${window} ${a.quality} ${said} | ${really} | ${v.room.draft.sensor.intervalS} s | ${a.reasons.join(',')}`
}

/** Everything that somebody who wants to do better should look at, one line each. */
export function findingsOf(
  building: TruthBuilding,
  part: number,
  seed: number,
  judgement: Judgement,
): string {
  const where = `${building.className} seed ${seed} part ${part}`
  const lines: string[] = []
  for (const v of judgement.verdicts) {
    const accepted = v.answer.quality === 'accepted'
    if (v.falseAccept) lines.push(lineOf(where, v, 'FALSE'))
    else if (v.gross) lines.push(lineOf(where, v, 'GROSS'))
    else if (v.noDecay) lines.push(lineOf(where, v, 'NO DECAY'))
    else if (accepted && v.covered === false) lines.push(lineOf(where, v, 'MISS'))
    else if (v.boundHolds === false) lines.push(lineOf(where, v, 'BOUND'))
    else if (v.outdoorHolds === false) lines.push(lineOf(where, v, 'OUTDOOR'))
    if (!v.nightRight) lines.push(lineOf(where, v, 'NIGHT'))
  }
  for (const e of judgement.evenings.filter((x) => x.answerable)) {
    const about = judgement.verdicts.filter((v) => v.evening === e)
    if (about.some((v) => v.answer.quality === 'accepted')) continue
    const s = e.spell
    const said = about
      .map((v) => `${v.answer.quality} ${v.answer.kind} ${v.answer.reasons.join(',')}`)
      .join('; ')
    const x = ((s.steadyToS - s.fromS) / 3600) * s.totalPerHour
    lines.push(
      `UNANSWERED ${where} ${e.room.id} ${clock(s.fromS)}–${clock(s.steadyToS)} A ${s.totalPerHour.toFixed(2)} E0 ${s.startExcessPpm.toFixed(0)} x ${x.toFixed(1)} ${e.room.draft.sensor.intervalS} s: ${said || 'nothing said'}`,
    )
  }
  return lines.join('\n')
}
