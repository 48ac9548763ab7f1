import type { CorridorPlan, Lesson, RoomPlan } from './types'

const WEEKDAYS = [1, 2, 3, 4, 5]

const defaults = {
  airSystem: null,
  roofVentRatePerHour: 0,
  infiltrationRatePerHour: 0.2,
  doorLeakM3PerHour: 1.5,
  singlePerson: false,
  designFlowLps: null,
} as const

const office = (staff: number) =>
  ({ kind: 'office', staff, arrive: '08:50', leave: '17:20', metabolicRate: 1.2, together: false }) as const
const workshop = (staff: number) =>
  ({ kind: 'office', staff, arrive: '08:05', leave: '16:35', metabolicRate: 1.9, together: true }) as const
const meetings = (from: number, to: number, perDay: number) =>
  ({ kind: 'meeting', from, to, perDay }) as const

const seminarSlots: readonly Lesson[] = [
  { days: WEEKDAYS, from: '09:15', to: '10:45', chance: 0.85 },
  { days: WEEKDAYS, from: '11:10', to: '12:25', chance: 0.7 },
  { days: WEEKDAYS, from: '13:30', to: '15:00', chance: 0.75 },
  { days: WEEKDAYS, from: '15:20', to: '16:40', chance: 0.5 },
  { days: [2, 4], from: '18:20', to: '19:50', chance: 0.9 },
]
const hallSlots: readonly Lesson[] = [
  { days: WEEKDAYS, from: '10:00', to: '11:00', chance: 0.6 },
  { days: WEEKDAYS, from: '11:30', to: '12:30', chance: 0.4 },
  { days: WEEKDAYS, from: '14:00', to: '15:30', chance: 0.65 },
]
const tutorialSlots: readonly Lesson[] = [
  { days: WEEKDAYS, from: '09:30', to: '10:30', chance: 0.7 },
  { days: WEEKDAYS, from: '11:15', to: '12:30', chance: 0.7 },
  { days: WEEKDAYS, from: '13:45', to: '15:15', chance: 0.75 },
  { days: WEEKDAYS, from: '15:45', to: '16:45', chance: 0.5 },
]

const libraryOpen = [
  { from: '09:00', to: '12:45' },
  { from: '13:45', to: '17:40' },
] as const

const ground = { ...defaults, floor: 'ground', airHandler: 'AH-1' } as const
const first = { ...defaults, floor: 'first', airHandler: 'AH-2' } as const
const second = { ...defaults, floor: 'second', airHandler: 'AH-3' } as const

// biome-ignore format: one room a row, read as a table
export const rooms: readonly RoomPlan[] = [
  { ...ground, number: 'G.01', name: 'Wheel Room', use: 'meeting room', tenancy: null, floorAreaM2: 40, volumeM3: 124, designHeadcount: 14, permittedOccupancy: 18, supplyLps: 183, activity: meetings(9, 15, 3), designFlowLps: 150 },
  { ...ground, number: 'G.02', name: 'Reception', use: 'reception', tenancy: null, floorAreaM2: 54, volumeM3: 178, designHeadcount: 6, permittedOccupancy: 12, supplyLps: 105, infiltrationRatePerHour: 0.35, activity: { kind: 'reception', staff: 2, visitorsPerDay: 34 } },
  { ...ground, number: 'G.03', name: 'Race Canteen', use: 'canteen', tenancy: 'weir', floorAreaM2: 140, volumeM3: 476, designHeadcount: 60, permittedOccupancy: 70, supplyLps: 350, activity: { kind: 'canteen', cooks: 2 } },
  { ...ground, number: 'G.04', name: 'Bale Workshop', use: 'workshop', tenancy: 'cardroom', floorAreaM2: 130, volumeM3: 520, designHeadcount: 10, permittedOccupancy: 16, supplyLps: 245, infiltrationRatePerHour: 0.25, activity: workshop(10) },
  { ...ground, number: 'G.05', name: 'Weir Seminar', use: 'classroom', tenancy: 'weir', floorAreaM2: 62, volumeM3: 192, designHeadcount: 26, permittedOccupancy: 30, supplyLps: 237, activity: { kind: 'lessons', slots: seminarSlots, from: 18, to: 25, staffed: true } },
  { ...ground, number: 'G.06', name: 'Boiler Study', use: 'single office', tenancy: 'weir', floorAreaM2: 18, volumeM3: 56, designHeadcount: 1, permittedOccupancy: 3, supplyLps: 26, singlePerson: true, activity: office(1) },
  { ...ground, number: 'G.07', name: 'Sluice', use: 'single office', tenancy: 'weir', floorAreaM2: 15, volumeM3: 45, designHeadcount: 1, permittedOccupancy: 3, supplyLps: 28, singlePerson: true, activity: office(1) },
  { ...ground, number: 'G.08', name: 'Yard Workshop', use: 'workshop', tenancy: 'cardroom', airHandler: null, airSystem: 'natural', floorAreaM2: 150, volumeM3: 600, designHeadcount: 12, permittedOccupancy: 20, supplyLps: 0, roofVentRatePerHour: 1.4, infiltrationRatePerHour: 0.4, activity: workshop(12) },
  { ...first, number: '1.01', name: 'Carding Room', use: 'open office', tenancy: 'cardroom', floorAreaM2: 260, volumeM3: 910, designHeadcount: 34, permittedOccupancy: 45, supplyLps: 504, activity: office(32) },
  { ...first, number: '1.02', name: 'Card Meeting', use: 'meeting room', tenancy: 'cardroom', floorAreaM2: 24, volumeM3: 72, designHeadcount: 6, permittedOccupancy: 16, supplyLps: 69, activity: meetings(3, 6, 4) },
  { ...first, number: '1.03', name: 'Spindle', use: 'meeting room', tenancy: 'cardroom', floorAreaM2: 28, volumeM3: 84, designHeadcount: 8, permittedOccupancy: 12, supplyLps: 107, activity: meetings(6, 9, 3) },
  { ...first, number: '1.04', name: 'Bobbin', use: 'meeting room', tenancy: 'bobbin', floorAreaM2: 30, volumeM3: 90, designHeadcount: 6, permittedOccupancy: 10, supplyLps: 82, activity: meetings(5, 8, 3) },
  { ...first, number: '1.05', name: 'Shuttle', use: 'meeting room', tenancy: 'bobbin', floorAreaM2: 26, volumeM3: 78, designHeadcount: 6, permittedOccupancy: 10, supplyLps: 88, activity: meetings(5, 8, 3) },
  { ...first, number: '1.06', name: 'Selvedge', use: 'meeting room', tenancy: 'cardroom', floorAreaM2: 44, volumeM3: 132, designHeadcount: 16, permittedOccupancy: 20, supplyLps: 186, activity: meetings(11, 18, 3) },
  { ...first, number: '1.07', name: 'Warp Office', use: 'office', tenancy: 'bobbin', airHandler: 'AH-4', floorAreaM2: 96, volumeM3: 298, designHeadcount: 12, permittedOccupancy: 16, supplyLps: 480, activity: office(12) },
  { ...first, number: '1.08', name: 'Weft Office', use: 'office', tenancy: 'bobbin', airHandler: 'AH-4', floorAreaM2: 92, volumeM3: 285, designHeadcount: 11, permittedOccupancy: 16, supplyLps: 460, activity: office(11) },
  { ...second, number: '2.01', name: 'Loom Hall', use: 'teaching hall', tenancy: 'weir', floorAreaM2: 210, volumeM3: 860, designHeadcount: 90, permittedOccupancy: 110, supplyLps: 878, activity: { kind: 'lessons', slots: hallSlots, from: 45, to: 85, staffed: true } },
  { ...second, number: '2.02', name: 'Heddle', use: 'meeting room', tenancy: 'skein', floorAreaM2: 32, volumeM3: 96, designHeadcount: 12, permittedOccupancy: 14, supplyLps: 130, activity: meetings(8, 12, 4) },
  { ...second, number: '2.03', name: 'Treadle', use: 'tutorial room', tenancy: 'weir', floorAreaM2: 26, volumeM3: 78, designHeadcount: 6, permittedOccupancy: 9, supplyLps: 45, activity: { kind: 'lessons', slots: tutorialSlots, from: 4, to: 6, staffed: true } },
  { ...second, number: '2.04', name: 'Reed Room', use: 'meeting room', tenancy: 'skein', floorAreaM2: 36, volumeM3: 108, designHeadcount: 12, permittedOccupancy: 16, supplyLps: 126, activity: meetings(9, 14, 3) },
  { ...second, number: '2.05', name: 'Twill', use: 'meeting room', tenancy: 'skein', floorAreaM2: 30, volumeM3: 90, designHeadcount: 8, permittedOccupancy: 12, supplyLps: 119, activity: meetings(6, 10, 3) },
  { ...second, number: '2.06', name: 'Damask', use: 'tutorial room', tenancy: 'weir', floorAreaM2: 28, volumeM3: 84, designHeadcount: 8, permittedOccupancy: 10, supplyLps: 73, activity: { kind: 'lessons', slots: tutorialSlots, from: 5, to: 8, staffed: true } },
  { ...second, number: '2.07', name: 'Skein Office', use: 'office', tenancy: 'skein', airHandler: 'AH-4', floorAreaM2: 88, volumeM3: 264, designHeadcount: 11, permittedOccupancy: 14, supplyLps: 440, activity: office(11) },
  { ...second, number: '2.08', name: 'Rafter Library', use: 'library', tenancy: 'skein', airHandler: 'AH-5', floorAreaM2: 120, volumeM3: 420, designHeadcount: 14, permittedOccupancy: 24, supplyLps: 231, activity: { kind: 'library', visitsPerDay: 42, open: libraryOpen, circleDays: [1, 2, 3, 4] } },
]

/** Landings join the rooms of a floor; their numbers end in .00. */
// biome-ignore format: one landing a row
export const corridors: readonly CorridorPlan[] = [
  { number: 'G.00', name: 'Ground landing', floor: 'ground', floorAreaM2: 78, volumeM3: 240, supplyLps: 30, airHandler: 'AH-1', infiltrationRatePerHour: 0.5 },
  { number: '1.00', name: 'First landing', floor: 'first', floorAreaM2: 66, volumeM3: 200, supplyLps: 22, airHandler: 'AH-2', infiltrationRatePerHour: 0.35 },
  { number: '2.00', name: 'Second landing', floor: 'second', floorAreaM2: 66, volumeM3: 195, supplyLps: 16, airHandler: 'AH-3', infiltrationRatePerHour: 0.35 },
]

/** Air that the open stair carries between neighbouring landings, each direction, m³/h. */
export const stairExchangeM3PerHour = 40
