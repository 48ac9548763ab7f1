/** The demo building as data. Flows in L/s, volumes in m³, times building-local. */

export type AirSystem = 'outdoor' | 'recirculating' | 'natural' | 'unknown'
export type WeeklyHours = { days: readonly number[]; from: string; to: string }

export type FloorPlan = { key: string; name: string; ordinal: number }

export type AirHandlerPlan = {
  code: string
  name: string
  airSystem: AirSystem
  /** share of outdoor air in the supply: 1 unless recirculating */
  outdoorFraction: number
  /** what the documents say; the stories may make the plant do otherwise */
  hours: readonly WeeklyHours[]
}

export type TenancyPlan = {
  key: string
  name: string
  digestEmails: readonly string[]
  hours: readonly WeeklyHours[]
}

/** What people do in a room; `people/` gives each kind its days. */
export type RoomActivity =
  /** `together`: a crew that starts, breaks and stops as one */
  | {
      kind: 'office'
      staff: number
      arrive: string
      leave: string
      metabolicRate: number
      together: boolean
    }
  | { kind: 'meeting'; from: number; to: number; perDay: number }
  | { kind: 'lessons'; slots: readonly Lesson[]; from: number; to: number; staffed: boolean }
  | { kind: 'canteen'; cooks: number }
  | { kind: 'reception'; staff: number; visitorsPerDay: number }
  /** readers come and go while it is open; on circle days ten to fifteen stay until the doors shut */
  | {
      kind: 'library'
      visitsPerDay: number
      open: readonly { from: string; to: string }[]
      circleDays: readonly number[]
    }

/** A timetabled slot with the chance that it is held on one of its weekdays. */
export type Lesson = { days: readonly number[]; from: string; to: string; chance: number }

export type RoomPlan = {
  number: string
  name: string
  floor: string
  use: string
  tenancy: string | null
  airHandler: string | null
  airSystem: AirSystem | null
  floorAreaM2: number
  volumeM3: number
  designHeadcount: number
  permittedOccupancy: number
  /** outdoor air only: flow of outdoor air; recirculating: supply flow; L/s */
  supplyLps: number
  /** natural rooms: air-change rate through roof vents, open while the house is open, 1/h at a mean day's wind */
  roofVentRatePerHour: number
  /** air-change rate through cracks at a mean day's wind, 1/h */
  infiltrationRatePerHour: number
  /** exchange with the landing round a closed door, each direction, m³/h */
  doorLeakM3PerHour: number
  singlePerson: boolean
  /** judged by its own design flow in place of the standard's preset, L/s */
  designFlowLps: number | null
  activity: RoomActivity
}

export type CorridorPlan = {
  number: string
  name: string
  floor: string
  floorAreaM2: number
  volumeM3: number
  supplyLps: number
  airHandler: string
  infiltrationRatePerHour: number
}

export type SensorPosition = 'room' | 'exhaust' | 'supply' | 'outdoor' | 'corridor'

export type SensorModel = {
  name: string
  accuracyPpm: number
  accuracyPct: number
  resolutionPpm: number
  rangeMaxPpm: number
  /** first-order time constant, s */
  lagS: number
  /** white noise of one reading, standard deviation, ppm */
  noisePpm: number
}

export type SensorPlan = {
  deviceId: string
  label: string
  /** room or corridor number; null on the roof */
  place: string | null
  position: SensorPosition
  lead: boolean
  model: SensorModel
}

export type Closure = { name: string; fromDate: string; toDate: string }

export type Scenario = {
  organization: { publicId: string; name: string }
  building: {
    slug: string
    name: string
    timeZone: string
    altitudeM: number
    openFrom: string
    openTo: string
  }
  floors: readonly FloorPlan[]
  airHandlers: readonly AirHandlerPlan[]
  tenancies: readonly TenancyPlan[]
  rooms: readonly RoomPlan[]
  corridors: readonly CorridorPlan[]
  /** air that the open stair carries between neighbouring landings, each direction, m³/h */
  stairExchangeM3PerHour: number
  sensors: readonly SensorPlan[]
  /** closures of the building around a first start on the given local day */
  closures: (firstDay: number) => Closure[]
}
