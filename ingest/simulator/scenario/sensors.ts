import { rooms } from './rooms'
import type { SensorModel, SensorPlan } from './types'

const wall: SensorModel = {
  name: 'wall, infrared',
  accuracyPpm: 30,
  accuracyPct: 3,
  resolutionPpm: 1,
  rangeMaxPpm: 5000,
  lagS: 60,
  noisePpm: 3,
}
const duct: SensorModel = { ...wall, name: 'duct, infrared', accuracyPpm: 40, lagS: 40, noisePpm: 4 }
const roof: SensorModel = { ...wall, name: 'roof, infrared', accuracyPpm: 20, lagS: 90, noisePpm: 2 }

const place = (number: string) => number.replace('.', '').toLowerCase()

const wallSensors: SensorPlan[] = rooms.map((room) => ({
  deviceId: `sm-${place(room.number)}`,
  label: `${room.name}, wall`,
  place: room.number,
  position: 'room',
  lead: true,
  model: wall,
}))

/** Thirty sensors: one on the wall of each room, a second in the hall, two in ducts, two on landings, one on the roof. */
export const sensors: readonly SensorPlan[] = [
  ...wallSensors,
  {
    deviceId: 'sm-201-rear',
    label: 'Loom Hall, rear wall',
    place: '2.01',
    position: 'room',
    lead: false,
    model: wall,
  },
  {
    deviceId: 'sm-g01-supply',
    label: 'Wheel Room, supply duct',
    place: 'G.01',
    position: 'supply',
    lead: false,
    model: duct,
  },
  {
    deviceId: 'sm-g01-exhaust',
    label: 'Wheel Room, exhaust',
    place: 'G.01',
    position: 'exhaust',
    lead: false,
    model: duct,
  },
  {
    deviceId: 'sm-100',
    label: 'First landing',
    place: '1.00',
    position: 'corridor',
    lead: true,
    model: wall,
  },
  {
    deviceId: 'sm-200',
    label: 'Second landing',
    place: '2.00',
    position: 'corridor',
    lead: true,
    model: wall,
  },
  {
    deviceId: 'sm-roof',
    label: 'Roof, north side',
    place: null,
    position: 'outdoor',
    lead: false,
    model: roof,
  },
]
