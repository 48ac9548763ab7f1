import { Simulation, type SimulationState } from './simulation'
import type { World } from './world'

/** Readings of whole minutes, sensor after sensor in each minute; NaN in `co2Ppm` where none was taken. */
export type HistoryBatch = {
  /** epoch minute of the first row */
  startMinute: number
  minutes: number
  sensors: number
  /** second of the minute at which each sensor reports */
  phaseS: Float64Array
  co2Ppm: Float32Array
  temperatureC: Float32Array
  relativeHumidityPct: Float32Array
  /** the mill at the batch's end, to go on from */
  state: SimulationState
}

export type HistoryOptions = {
  /** epoch seconds, rounded down to the minute; the history's own start when left out */
  fromS?: number
  /** epoch seconds; minutes that have ended by then are made */
  toS: number
  /** a state to go on from, if it lies at or before the start */
  state?: SimulationState | undefined
  batchMinutes?: number
}

/** The readings of a span of minutes in batches of a day unless told otherwise, made as they are asked for. */
export function* makeHistory(world: World, options: HistoryOptions): Generator<HistoryBatch, void> {
  const from = Math.floor((options.fromS ?? world.historyStartS) / 60)
  const to = Math.floor(options.toS / 60)
  const usable = options.state && options.state.minute <= from ? options.state : undefined
  const simulation = new Simulation(world, usable)
  simulation.runTo(from)
  for (let at = from; at < to; ) {
    const minutes = Math.min(options.batchMinutes ?? 1440, to - at)
    yield makeBatch(simulation, at, minutes)
    at += minutes
  }
}

function makeBatch(simulation: Simulation, startMinute: number, minutes: number): HistoryBatch {
  const sensors = simulation.world.scenario.sensors.length
  const batch = {
    startMinute,
    minutes,
    sensors,
    phaseS: new Float64Array(sensors),
    co2Ppm: new Float32Array(minutes * sensors),
    temperatureC: new Float32Array(minutes * sensors),
    relativeHumidityPct: new Float32Array(minutes * sensors),
  }
  for (let m = 0; m < minutes; m++) {
    const reading = simulation.step()
    batch.phaseS.set(reading.phaseS)
    batch.co2Ppm.set(reading.co2Ppm, m * sensors)
    batch.temperatureC.set(reading.temperatureC, m * sensors)
    batch.relativeHumidityPct.set(reading.relativeHumidityPct, m * sensors)
  }
  return { ...batch, state: simulation.snapshot() }
}

type EachReading = (
  sensor: number,
  timeS: number,
  co2Ppm: number,
  temperatureC: number,
  humidityPct: number,
) => void

/** Calls `each` for every reading of a batch in order of time: place in the plan, instant (epoch seconds), ppm, °C, %. */
export function forEachReading(batch: HistoryBatch, each: EachReading): void {
  for (let m = 0; m < batch.minutes; m++)
    for (let s = 0; s < batch.sensors; s++) visit(batch, m * batch.sensors + s, each)
}

/** As forEachReading, sensor by sensor: the order in which the database keeps them together. */
export function forEachReadingBySensor(batch: HistoryBatch, each: EachReading): void {
  for (let s = 0; s < batch.sensors; s++)
    for (let m = 0; m < batch.minutes; m++) visit(batch, m * batch.sensors + s, each)
}

function visit(batch: HistoryBatch, row: number, each: EachReading): void {
  const co2Ppm = batch.co2Ppm[row]!
  if (Number.isNaN(co2Ppm)) return
  const sensor = row % batch.sensors
  const timeS = (batch.startMinute + (row - sensor) / batch.sensors) * 60 + batch.phaseS[sensor]!
  // 32-bit floats hold tenths inexactly: back to the tenth that the sensor said
  const temperatureC = Math.round(10 * batch.temperatureC[row]!) / 10
  each(sensor, timeS, co2Ppm, temperatureC, batch.relativeHumidityPct[row]!)
}
