import { cautionOf, SOURCES } from '../sources'
import { type FlowPreset, getFlowPreset } from './presets'

/** The requirement a room is held against: a preset, the room's own design flow, or a free flow per person and per m². */
export type Basis =
  | { kind: 'preset'; presetKey: string; ez?: number }
  | { kind: 'design-flow'; name?: string }
  | { kind: 'per-person'; name?: string; flowLpsPerPerson: number; flowLpsPerM2?: number }

export type BasisRoom = {
  designHeadcount: number | null
  floorAreaM2: number | null
  designFlowLps?: number | null
}

export type RequiredFlow =
  | {
      flowLps: number
      name: string
      /** e.g. "10 persons × 7 L/s + 40 m² × 0.7 L/s" */
      reckoning: string
      edition: string | null
      caution: string | null
    }
  | { flowLps: null; name: string; missing: string }

type Parts = {
  name: string
  person: number
  area: number
  combine: FlowPreset['combine']
  leastPerPerson: number
  ez: number
  edition: string | null
  caution: string | null
}

function partsOf(basis: Exclude<Basis, { kind: 'design-flow' }>): Parts {
  if (basis.kind === 'per-person') {
    const { flowLpsPerPerson: person, flowLpsPerM2: area = 0 } = basis
    if (!(person >= 0 && area >= 0 && person + area > 0)) {
      throw new RangeError('a flow per person or per m² must be positive')
    }
    const name = basis.name ?? `${person} L/s per person${area > 0 ? ` and ${area} L/s per m²` : ''}`
    return { name, person, area, combine: 'sum', leastPerPerson: 0, ez: 1, edition: null, caution: null }
  }
  const preset = getFlowPreset(basis.presetKey)
  if (!preset) throw new RangeError(`no requirement is called ${basis.presetKey}`)
  const ez = preset.usesEz ? (basis.ez ?? 1) : 1
  if (!(ez > 0 && ez <= 2)) throw new RangeError(`Ez must lie between 0 and 2, got ${ez}`)
  return {
    name: preset.name,
    person: preset.flowLpsPerPerson,
    area: preset.flowLpsPerM2,
    combine: preset.combine,
    leastPerPerson: preset.leastTotalLpsPerPerson ?? 0,
    ez,
    edition: SOURCES[preset.source].edition,
    caution: cautionOf(preset.source),
  }
}

function flowOf(parts: Parts, persons: number, areaM2: number): number {
  const ofPersons = parts.person * persons
  const ofArea = parts.area * areaM2
  const flow = parts.combine === 'sum' ? ofPersons + ofArea : Math.max(ofPersons, ofArea)
  return Math.max(flow, parts.leastPerPerson * persons) / parts.ez
}

/**
 * Outdoor flow (L/s) that the basis asks of the room at its design headcount.
 * @returns flowLps null and what is missing when the room lacks a headcount, an area or a design flow that the basis needs
 * @throws RangeError for an unknown preset key or a basis without a positive flow
 * @source EN 16798-1:2019 q_tot = n q_p + A q_B; ASHRAE 62.1 V_oz = (Rp Pz + Ra Az) / Ez
 */
export function requiredFlowLps(basis: Basis, room: BasisRoom): RequiredFlow {
  if (basis.kind === 'design-flow') {
    const name = basis.name ?? 'design flow'
    const flow = room.designFlowLps ?? null
    if (flow === null || !(flow > 0)) return { flowLps: null, name, missing: 'design flow' }
    return { flowLps: flow, name, reckoning: `${flow} L/s`, edition: null, caution: null }
  }
  const parts = partsOf(basis)
  const needsPersons = parts.person > 0 || parts.leastPerPerson > 0
  if (needsPersons && !((room.designHeadcount ?? 0) > 0)) {
    return { flowLps: null, name: parts.name, missing: 'design headcount' }
  }
  if (parts.area > 0 && !((room.floorAreaM2 ?? 0) > 0)) {
    return { flowLps: null, name: parts.name, missing: 'floor area' }
  }
  const persons = room.designHeadcount ?? 0
  const areaM2 = room.floorAreaM2 ?? 0
  const words = [
    parts.person > 0 ? `${persons} persons × ${parts.person} L/s` : '',
    parts.area > 0 ? `${areaM2} m² × ${parts.area} L/s` : '',
  ].filter(Boolean)
  const joined = words.join(parts.combine === 'sum' ? ' + ' : ' or ')
  return {
    flowLps: flowOf(parts, persons, areaM2),
    name: parts.name,
    reckoning: parts.ez === 1 ? joined : `(${joined}) / ${parts.ez}`,
    edition: parts.edition,
    caution: parts.caution,
  }
}

/**
 * Largest whole number of people whose requirement a flow covers in a room (the basis solved for n, rounded down). 0 when not even the
 * part per m² is covered; null when the basis has no part per person and so sets no number.
 */
export function personsForFlow(basis: Basis, flowLps: number, floorAreaM2: number | null): number | null {
  if (basis.kind === 'design-flow') return null
  const parts = partsOf(basis)
  if (parts.person <= 0) return null
  if (parts.area > 0 && floorAreaM2 === null) return null
  const guess = Math.max(0, Math.floor((flowLps * parts.ez) / parts.person))
  for (let n = guess; n > 0; n--) {
    // a hair of tolerance: 10 persons at 7 L/s must fit into 70 L/s
    if (flowOf(parts, n, floorAreaM2 ?? 0) <= flowLps * (1 + 1e-12)) return n
  }
  return 0
}
