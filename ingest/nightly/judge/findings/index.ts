import type { FindingKind, NewFinding } from '@/db/changes/findings'
import { airFromNeighbour } from './air-from-neighbour'
import { sensorDrifting } from './sensor-drifting'
import { supplyStoppedEarly } from './supply-stopped-early'
import { tooSmallForItsUse } from './too-small-for-its-use'
import type { FindingInput } from './types'
import { ventilatedWhileEmpty } from './ventilated-while-empty'

export type { FindingInput } from './types'

const finders: readonly { kind: FindingKind; find: (input: FindingInput) => NewFinding[] }[] = [
  { kind: 'supply stopped early', find: supplyStoppedEarly },
  { kind: 'ventilated while empty', find: ventilatedWhileEmpty },
  { kind: 'too small for its use', find: tooSmallForItsUse },
  { kind: 'air from neighbour', find: airFromNeighbour },
  { kind: 'sensor drifting', find: sensorDrifting },
]

/** The kinds that the nightly job finds; "sensor silent" is the watch's. */
export const NIGHTLY_FINDINGS: readonly FindingKind[] = finders.map(({ kind }) => kind)

/** Everything that stands out in the last nights of a building. */
export function findAll(input: FindingInput): NewFinding[] {
  return finders.flatMap(({ find }) => find(input))
}
