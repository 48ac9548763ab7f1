import { airHandlers, building, closuresAround, floors, organization, tenancies } from './building'
import { corridors, rooms, stairExchangeM3PerHour } from './rooms'
import { sensors } from './sensors'
import type { Scenario } from './types'

export * from './types'

/** Sallow Mill: one converted mill, 24 rooms on three floors, four tenancies, five air handlers, thirty sensors. */
export const sallowMill: Scenario = {
  organization,
  building,
  floors,
  airHandlers,
  tenancies,
  rooms,
  corridors,
  stairExchangeM3PerHour,
  sensors,
  closures: closuresAround,
}
