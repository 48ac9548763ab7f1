import { createHash } from 'node:crypto'
import { canonicalJson } from '@/db/canonical-json'
import type { NewRoomWeek } from '@/db/changes/weeks'
import type { BuildingPlan, PlanDesign, PlanRoom } from '@/db/queries/building-plan'
import { personsSupported } from '@/lib/air/supports'
import { MODES, type Mode } from '@/lib/air/types'
import { judgeRoom, type RoomVerdict, VERDICT_DAYS, VERDICT_MIN_DAYS } from '@/lib/air/verdict'
import { combineDays } from '@/lib/air/weeks'
import { addDays } from '@/lib/time'
import { airSystemOf, designOn } from '../analysis/rooms'
import { requirementOf } from './basis'
import type { JudgedEstimate } from './estimates'

export type RoomWeekInput = {
  plan: BuildingPlan
  room: PlanRoom
  weekStart: string
  /** last night that counts: Sunday, or the last analysed one of a running week */
  throughNight: string
  /** the room's estimates, at least of the 28 days up to `throughNight` */
  estimates: readonly JudgedEstimate[]
  /** first night of the present rate in the occupied mode, as known by `throughNight` */
  lastChangeNight: string | null
  methodVersion: string
}

/** A sensor's gain matters where the background is not its own: 95 % accuracy in per cent as a relative standard uncertainty. */
function gainUncertainty(
  plan: BuildingPlan,
  room: PlanRoom,
  used: readonly JudgedEstimate[],
  night: string,
): number {
  const foreign = used.filter(
    (one) => one.backgroundOrigin === 'outdoor sensor' || one.backgroundOrigin === 'default',
  )
  if (2 * foreign.length <= used.length) return 0
  const placed = plan.placements.findLast(
    (placement) =>
      placement.roomId === room.id && placement.lead && placement.fromAt.toISOString() <= `${night}T24`,
  )
  const percent = plan.sensors.find((sensor) => sensor.id === placed?.sensorId)?.accuracyPct ?? 0
  return percent / 100 / 1.96
}

/** The mode in which a room is judged though nothing was measured in it. */
const occupiedMode = (plan: BuildingPlan, room: PlanRoom): Mode =>
  airSystemOf(plan, room) === 'natural' ? 'natural' : 'supply on'

function fractionOf(plan: BuildingPlan, room: PlanRoom) {
  const handler = plan.airHandlers.find((one) => one.id === room.airHandlerId)
  if (!handler?.outdoorFraction) return null
  return { value: handler.outdoorFraction, standardUncertainty: handler.outdoorFractionUncertainty ?? 0 }
}

function verdictColumns(
  { plan, room }: RoomWeekInput,
  design: PlanDesign,
  verdict: RoomVerdict,
  requirement: ReturnType<typeof requirementOf>,
) {
  const supports = personsSupported({
    flowLowLps: verdict.flowLps?.low ?? null,
    basis: requirement.basis,
    floorAreaM2: design.floorAreaM2,
    permittedOccupancy: design.permittedOccupancy,
  })
  return {
    verdict: verdict.verdict,
    verdictReason: verdict.reason.code,
    verdictSentence: verdict.reason.sentence,
    flowLps: verdict.flowLps?.value ?? null,
    flowLowLps: verdict.flowLps?.low ?? null,
    flowHighLps: verdict.flowLps?.high ?? null,
    // too few days to judge by are too few to promise by
    supportsPersons: verdict.days >= VERDICT_MIN_DAYS ? supports.persons : null,
    modeFrom: verdict.modeFrom ?? null,
    verdictSince: verdict.sinceNight,
    mode: verdict.mode ?? occupiedMode(plan, room),
  }
}

const noVerdict = {
  verdict: null,
  verdictReason: null,
  verdictSentence: null,
  flowLps: null,
  flowLowLps: null,
  flowHighLps: null,
  supportsPersons: null,
  modeFrom: null,
}

/**
 * One room's week: a row for each mode that the last 28 days hold anything of. Exactly one row carries the verdict: that of the mode that the
 * verdict speaks for, or of the occupied mode where nothing was measured. No rows while nothing is entered about the room's size.
 */
export function roomWeek(input: RoomWeekInput): NewRoomWeek[] {
  const { plan, room, weekStart, throughNight, methodVersion } = input
  const design = designOn(plan, room.id, throughNight)
  if (!design) return []
  const windowStart = addDays(throughNight, 1 - VERDICT_DAYS)
  const estimates = input.estimates.filter((one) => one.night >= windowStart && one.night <= throughNight)
  const gain = gainUncertainty(plan, room, estimates, throughNight)
  const requirement = requirementOf(plan, room, design)
  const verdict = judgeRoom({
    throughNight,
    estimates,
    lastChangeNight: input.lastChangeNight,
    volumeM3: design.volumeM3,
    volumeRelativeUncertainty: design.volumeRelativeUncertainty,
    basisFlowLps: requirement.flowLps,
    airSystem: airSystemOf(plan, room),
    outdoorFraction: fractionOf(plan, room),
    designHeadcount: design.designHeadcount,
    gainRelativeUncertainty: gain,
  })
  const judged = verdictColumns(input, design, verdict, requirement)
  const modes = MODES.filter((mode) => mode === judged.mode || estimates.some((one) => one.mode === mode))
  return modes.map((mode) => {
    const since = mode === judged.mode ? verdict.sinceNight : windowStart
    const own = estimates.filter((one) => one.mode === mode)
    const ofWeek = own.filter((one) => one.night >= weekStart)
    const week = combineDays(ofWeek, { gainRelativeUncertainty: gain })
    const lately = combineDays(
      own.filter((one) => one.night >= since),
      { gainRelativeUncertainty: gain },
    )
    const row = {
      ...{ organizationId: room.organizationId, buildingId: room.buildingId, roomId: room.id },
      ...{ weekStart, throughNight, methodVersion },
      ...(mode === judged.mode ? judged : { ...noVerdict, verdictSince: since, mode }),
      airChangeRatePerHour: week?.ratePerHour ?? null,
      airChangeRateLowPerHour: week?.lowPerHour ?? null,
      airChangeRateHighPerHour: week?.highPerHour ?? null,
      days: week?.days ?? 0,
      decays: week?.decays ?? 0,
      decaysRefused: ofWeek.filter((one) => one.quality === 'refused').length,
      verdictRatePerHour: lately?.ratePerHour ?? null,
      verdictRateLowPerHour: lately?.lowPerHour ?? null,
      verdictRateHighPerHour: lately?.highPerHour ?? null,
      verdictDays: lately?.days ?? 0,
      verdictDecays: lately?.decays ?? 0,
      isDilutionRate: verdict.isDilutionRate,
      basisName: requirement.name,
      basisFlowLps: requirement.flowLps,
      designHeadcount: design.designHeadcount,
      volumeM3: design.volumeM3,
    }
    const inputs = canonicalJson({ own, design, row })
    return { ...row, inputHash: createHash('sha256').update(inputs).digest('hex').slice(0, 32) }
  })
}
