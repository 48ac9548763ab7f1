import type { BuildingPlan, PlanDesign, PlanRoom } from '@/db/queries/building-plan'
import { type Basis, requiredFlowLps } from '@/lib/air/targets'

/** The requirement entered for a room as the science takes it; null where none is, or where its figures are missing. */
export function basisOf(plan: BuildingPlan, room: PlanRoom): Basis | null {
  const row = plan.bases.find((basis) => basis.id === room.basisId)
  if (!row) return null
  if (row.kind === 'preset')
    return row.presetKey === null ? null : { kind: 'preset', presetKey: row.presetKey }
  if (row.kind === 'design-flow') return { kind: 'design-flow', name: row.name }
  const { flowLpsPerPerson, flowLpsPerM2, name } = row
  if (!(flowLpsPerPerson ?? 0) && !(flowLpsPerM2 ?? 0)) return null
  return {
    kind: 'per-person',
    name,
    flowLpsPerPerson: flowLpsPerPerson ?? 0,
    flowLpsPerM2: flowLpsPerM2 ?? 0,
  }
}

/** Name and outdoor flow (L/s) that a room is held against on a date; the flow is null where an entry that it needs is missing. */
export function requirementOf(
  plan: BuildingPlan,
  room: PlanRoom,
  design: PlanDesign,
): { basis: Basis | null; name: string | null; flowLps: number | null } {
  const basis = basisOf(plan, room)
  if (!basis) return { basis: null, name: null, flowLps: null }
  const required = requiredFlowLps(basis, design)
  return { basis, name: required.name, flowLps: required.flowLps }
}
