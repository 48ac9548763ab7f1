import type { BuildingPlan } from '@/db/queries/building-plan'
import { isoWeekday, localToEpochS } from '@/lib/time'
import { isClosed } from './rooms'

export type Period = { fromS: number; toS: number }

/** The tenancy that holds a room at an instant, or undefined. */
export function tenancyAt(plan: BuildingPlan, roomId: number, atS: number): number | undefined {
  const at = new Date(atS * 1000)
  return plan.roomTenancies.find(
    (held) => held.roomId === roomId && held.fromAt <= at && (held.toAt === null || at < held.toAt),
  )?.tenancyId
}

/** When a room is in use on a local date by what is entered: its tenancy's hours, else the building's; none while the building is shut. */
export function occupiedPeriods(
  plan: BuildingPlan,
  roomId: number,
  date: string,
  dayStartS: number,
): Period[] {
  if (isClosed(plan, date)) return []
  const { timeZone } = plan.building
  const tenancy = tenancyAt(plan, roomId, dayStartS + 12 * 3600)
  const occupied = plan.hours.filter((row) => row.purpose === 'occupied')
  const own = occupied.filter((row) => tenancy !== undefined && row.tenancyId === tenancy)
  const rows = own.length > 0 ? own : occupied.filter((row) => row.tenancyId === null)
  return rows
    .filter((row) => row.days.includes(isoWeekday(date)))
    .map((row) => ({
      fromS: localToEpochS(date, row.fromLocal, timeZone),
      toS: localToEpochS(date, row.toLocal === '24:00' ? '23:59:59' : row.toLocal, timeZone),
    }))
    .filter((period) => period.toS > period.fromS)
    .sort((a, b) => a.fromS - b.fromS)
}
