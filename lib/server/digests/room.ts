import type { BuildingPlan, PlanRoom } from '@/db/queries/building-plan'
import type { DayFacts } from '@/db/queries/nights'
import { purgeTimeS } from '@/lib/air/purge'
import { glassLevel } from '@/lib/air/room-state'
import { countWord, listed } from '@/lib/format/counts'
import { addDays, localDayBounds } from '@/lib/time'
import type { DigestDay, DigestRoom } from '@/lib/wire/digests'
import type { WeekMaterial } from './material'
import { dayState, duration, plainReason, standingOf, weekdayOf } from './words'

/** A room that stood at its limit counts as fresh when three quarters of the way back to outdoor air are done. */
const FRESH_SHARE = 0.75
/** Below this share of the occupied hours heard, "never over the limit" would claim too much. */
const LEAST_HEARD = 0.5

/** Did the tenancy hold the room for the whole of a local date? Only such days are told. */
export function heldAllDay(plan: BuildingPlan, roomId: number, tenancyId: number, date: string): boolean {
  const { startS, endS } = localDayBounds(date, plan.building.timeZone)
  return plan.roomTenancies.some(
    (held) =>
      held.roomId === roomId &&
      held.tenancyId === tenancyId &&
      held.fromAt.getTime() <= startS * 1000 &&
      (held.toAt === null || held.toAt.getTime() >= endS * 1000),
  )
}

function dayOf(date: string, facts: DayFacts | undefined): DigestDay {
  const weekday = weekdayOf(date)
  const peakPpm = facts?.peakPpm ?? null
  const level =
    facts && peakPpm !== null
      ? Math.round(100 * glassLevel(peakPpm, facts.outdoorPpm, facts.limitPpm)) / 100
      : null
  const state = dayState(level)
  const words =
    level === null
      ? `${weekday}: nothing heard`
      : `${weekday}: ${state}, at most ${Math.round(100 * level)} % of the way to the limit`
  return { date, weekday, level, peakPpm, state, overMinutes: facts?.overMin ?? 0, words }
}

/** How long the week's occupied hours were over the limit. Of a single person's room the days are not named. */
function overInWords(
  days: readonly { date: string; facts: DayFacts }[],
  options: { heardShare: number; namesDays: boolean },
): string {
  const over = days.filter(({ facts }) => facts.overMin > 0)
  const total = duration(over.reduce((sum, { facts }) => sum + facts.overMin, 0))
  if (over.length > 0) {
    const named =
      over.length >= 5
        ? `on ${countWord(over.length)} days`
        : `on ${listed(over.map(({ date }) => weekdayOf(date)))}`
    const when = options.namesDays ? named : 'in the week'
    return `over the limit for ${total} ${when}`
  }
  if (days.length === 0) return 'nothing heard this week'
  return options.heardShare >= LEAST_HEARD ? 'never over the limit' : 'not heard long enough to say'
}

/** One room's part of a tenancy's digest. */
export function digestRoom(material: WeekMaterial, tenancyId: number, room: PlanRoom): DigestRoom {
  const { plan, weekStart } = material
  const row = material.verdicts.find((one) => one.roomId === room.id)
  const held = [0, 1, 2, 3, 4, 5, 6]
    .map((days) => addDays(weekStart, days))
    .filter((date) => heldAllDay(plan, room.id, tenancyId, date))
  const factsOf = (date: string) =>
    material.runs.find((run) => run.localDate === date)?.carried.days?.[room.id]
  const days = held.flatMap((date) => {
    const facts = factsOf(date)
    return facts ? [{ date, facts }] : []
  })
  const sum = (name: 'overMin' | 'occupiedMin' | 'coveredMin') =>
    days.reduce((total, { facts }) => total + facts[name], 0)
  const standing = standingOf({
    verdict: row?.verdict ?? null,
    flowLowLps: row?.flowLowLps ?? null,
    basisFlowLps: row?.basisFlowLps ?? null,
  })
  const slowest = row?.verdictRateLowPerHour ?? 0
  return {
    roomId: room.publicId,
    ...{ number: room.number, name: room.name, use: room.use, standing },
    reason: standing === 'not proven yet' ? plainReason(row?.verdictReason ?? null) : null,
    supportsPersons: row?.supportsPersons ?? null,
    plannedFor: row?.designHeadcount ?? null,
    basisName: row?.basisName ?? null,
    days: room.singlePerson
      ? []
      : [0, 1, 2, 3, 4].map((n) => {
          const date = addDays(weekStart, n)
          return dayOf(date, held.includes(date) ? factsOf(date) : undefined)
        }),
    overMinutes: sum('overMin'),
    occupiedMinutes: sum('occupiedMin'),
    heardMinutes: sum('coveredMin'),
    overWords: overInWords(days, {
      heardShare: sum('coveredMin') / Math.max(1, sum('occupiedMin')),
      namesDays: !room.singlePerson,
    }),
    clearsInMinutes: slowest > 0 ? Math.ceil(purgeTimeS(slowest, FRESH_SHARE) / 300) * 5 : null,
  }
}
