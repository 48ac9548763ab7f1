import type { SourceKey } from '../sources'

/**
 * An outdoor-flow requirement as a sum of a part per person and a part per square metre, divided by the zone air distribution
 * effectiveness where the standard has one.
 */
export type FlowPreset = {
  key: string
  name: string
  group: 'EN 16798-1' | 'ASHRAE 62.1' | 'Other guidance'
  flowLpsPerPerson: number
  flowLpsPerM2: number
  /** how the two parts make the requirement */
  combine: 'sum' | 'larger'
  /** the total is never less than this, L/s per person */
  leastTotalLpsPerPerson?: number
  /** whether the breathing-zone flow is divided by Ez (ASHRAE 62.1) */
  usesEz: boolean
  source: SourceKey
}

const CATEGORIES = [
  { category: 'I', person: 10, veryLow: 0.5, low: 1.0, nonLow: 2.0 },
  { category: 'II', person: 7, veryLow: 0.35, low: 0.7, nonLow: 1.4 },
  { category: 'III', person: 4, veryLow: 0.2, low: 0.4, nonLow: 0.8 },
  { category: 'IV', person: 2.5, veryLow: 0.15, low: 0.3, nonLow: 0.6 },
] as const

const BUILDINGS = [
  { building: 'very low polluting', key: 'very-low', field: 'veryLow' },
  { building: 'low polluting', key: 'low', field: 'low' },
  { building: 'non-low polluting', key: 'non-low', field: 'nonLow' },
] as const

/** EN 16798-1:2019 annex B: q_tot = n q_p + A q_B, never below 4 L/s per person. */
const EN_16798: FlowPreset[] = CATEGORIES.flatMap((row) =>
  BUILDINGS.map(({ building, key, field }) => ({
    key: `en16798-${row.category.toLowerCase()}-${key}`,
    name: `EN 16798-1 category ${row.category}, ${building} building`,
    group: 'EN 16798-1' as const,
    flowLpsPerPerson: row.person,
    flowLpsPerM2: row[field],
    combine: 'sum' as const,
    leastTotalLpsPerPerson: 4,
    usesEz: false,
    source: 'en16798Flows' as const,
  })),
)

/** Key, name, Rp (L/s per person), Ra (L/s per m²), source; rows that are edition-dependent or uncertain are left out. */
const ASHRAE_ROWS: readonly (readonly [string, string, number, number, SourceKey])[] = [
  ['office', 'office space', 2.5, 0.3, 'ashrae621Offices'],
  ['conference', 'conference or meeting room', 2.5, 0.3, 'ashrae621Offices'],
  ['classroom-5-8', 'classroom, ages 5 to 8', 5, 0.6, 'ashrae621Rates'],
  ['classroom-9', 'classroom, age 9 and over', 5, 0.6, 'ashrae621Rates'],
  ['teaching-classroom', 'lecture classroom', 3.8, 0.3, 'ashrae621Rates'],
  ['teaching-hall', 'lecture hall, fixed seats', 3.8, 0.3, 'ashrae621Rates'],
  ['computer-lab', 'computer laboratory', 5, 0.6, 'ashrae621Rates'],
  ['daycare', 'day care, to age 4', 5, 0.9, 'ashrae621Rates'],
  ['science-lab', 'science laboratory', 5, 0.9, 'ashrae621Rates'],
  ['library', 'library', 2.5, 0.6, 'ashrae621Rates'],
  ['multi-use', 'multi-use assembly (education)', 3.8, 0.3, 'ashrae621Rates'],
  ['music', 'music, theatre or dance', 5, 0.3, 'ashrae621Rates'],
  ['restaurant', 'restaurant dining room', 3.8, 0.9, 'ashrae621Rates'],
  ['cafeteria', 'cafeteria, fast food or bar', 3.8, 0.9, 'ashrae621Rates'],
  ['reception', 'reception area', 2.5, 0.3, 'ashrae621Memory'],
  ['auditorium', 'auditorium seating area', 2.5, 0.3, 'ashrae621Memory'],
  ['worship', 'place of worship', 2.5, 0.3, 'ashrae621Memory'],
  ['museum', 'museum or gallery', 3.8, 0.3, 'ashrae621Memory'],
  ['retail', 'retail sales', 3.8, 0.6, 'ashrae621Memory'],
  ['aerobics', 'health club, aerobics room', 10, 0.3, 'ashrae621Memory'],
  ['weights', 'health club, weight room', 10, 0.3, 'ashrae621Memory'],
  ['hotel-bedroom', 'hotel bedroom', 2.5, 0.3, 'ashrae621Memory'],
]

/** ASHRAE 62.1 ventilation rate procedure: V_oz = (Rp Pz + Ra Az) / Ez. */
const ASHRAE_621: FlowPreset[] = ASHRAE_ROWS.map(([key, name, person, area, source]) => ({
  key: `ashrae621-${key}`,
  name: `ASHRAE 62.1 ${name}`,
  group: 'ASHRAE 62.1',
  flowLpsPerPerson: person,
  flowLpsPerM2: area,
  combine: 'sum',
  usesEz: true,
  source,
}))

const OTHER: FlowPreset[] = [
  {
    key: 'who-10',
    name: 'WHO roadmap, non-residential: 10 L/s per person',
    group: 'Other guidance',
    flowLpsPerPerson: 10,
    flowLpsPerM2: 0,
    combine: 'sum',
    usesEz: false,
    source: 'who',
  },
  {
    key: 'uk-adf-office',
    name: 'UK Approved Document F, offices: 10 L/s per person or 1 L/s per m², the larger',
    group: 'Other guidance',
    flowLpsPerPerson: 10,
    flowLpsPerM2: 1,
    combine: 'larger',
    usesEz: false,
    source: 'adf',
  },
]

/** Every flow requirement that can be chosen, in the order a list shows them. */
export const FLOW_PRESETS: readonly FlowPreset[] = [...EN_16798, ...ASHRAE_621, ...OTHER]

export function getFlowPreset(key: string): FlowPreset | undefined {
  return FLOW_PRESETS.find((preset) => preset.key === key)
}

/** One row of the zone air distribution effectiveness table. */
export type EzRow = { key: string; name: string; ez: number; source: 'ashrae621Ez' }

/** ASHRAE 62.1 Ez by how the air is supplied and returned (personalised ventilation is left out as uncertain). */
export const EZ_ROWS: readonly EzRow[] = (
  [
    ['ceiling-cool', 'ceiling supply of cool air', 1.0],
    ['ceiling-warm-floor-return', 'ceiling supply of warm air, floor return', 1.0],
    ['ceiling-warm-hot', 'ceiling supply 8 °C or more above the room, ceiling return', 0.8],
    [
      'ceiling-warm-jet',
      'ceiling supply less than 8 °C above the room, jet of 0.8 m/s reaches 1.4 m above the floor',
      1.0,
    ],
    ['ceiling-warm-no-jet', 'ceiling supply less than 8 °C above the room, jet slower than 0.8 m/s', 0.8],
    ['floor-warm-floor-return', 'floor supply of warm air, floor return', 1.0],
    ['floor-warm-ceiling-return', 'floor supply of warm air, ceiling return', 0.7],
    ['makeup-far', 'make-up air over half the room length from the exhaust', 0.8],
    ['makeup-near', 'make-up air within half the room length of the exhaust', 0.5],
    [
      'stratified-mixed',
      'floor supply of cool air, throw over 0.25 m/s at 1.4 m, return at or below 5.5 m',
      1.05,
    ],
    ['stratified', 'floor supply of cool air, throw up to 0.25 m/s at 1.4 m, return at or below 5.5 m', 1.2],
    ['stratified-high', 'floor supply of cool air, throw up to 0.25 m/s at 1.4 m, return above 5.5 m', 1.5],
  ] as const
).map(([key, name, ez]) => ({ key, name, ez, source: 'ashrae621Ez' }))
