import { outdoorTemperatureC, saturationGramsPerM3 } from '../physics/weather'
import { normalAt } from '../random'
import type { SensorPlan } from '../scenario'
import type { World } from '../world'
import { characterOf, driftPpm, reportsAt, type SensorCharacter } from './faults'
import { indicated, laggedStep } from './instrument'

/** Incomplete mixing at the sensor: a first-order process with this memory, min, and these sizes. */
const MIXING_MEMORY_MIN = 6
const MIXING_BASE_PPM = 1.2
const MIXING_SHARE = 0.006
/** A duct takes in this share of room air while its fan runs. */
const DUCT_LEAK = 0.03
/** The room's air follows its heating and people with this memory, min. */
const WARMING_MEMORY_MIN = 45
/** Water that people give off with their CO2: g/m³ of vapour for each ppm of excess. */
const VAPOUR_GRAMS_PER_PPM = 0.0022

export type SensorState = { laggedPpm: number[]; mixing: number[]; temperatureC: number[] }

/** One minute's readings, by sensor: NaN in `co2Ppm` where none was taken. */
export type MinuteReadings = {
  minute: number
  /** second of the minute at which each sensor reports */
  phaseS: Float64Array
  co2Ppm: Float64Array
  temperatureC: Float64Array
  relativeHumidityPct: Float64Array
}

/** The thirty sensors: lag, mixing, noise, offset, gain, drift, losses. */
export class SensorBank {
  private readonly laggedPpm: Float64Array
  private readonly mixing: Float64Array
  private readonly temperatureC: Float64Array
  private readonly atPhasePpm: Float64Array
  private readonly before: Float64Array
  private readonly inputPpm: Float64Array
  private readonly zone: Int16Array
  private readonly characters: SensorCharacter[]
  private readonly out: MinuteReadings
  private readonly mixingKept = Math.exp(-1 / MIXING_MEMORY_MIN)
  private outdoorPpm = 0
  private running: Uint8Array = new Uint8Array(0)

  constructor(
    private readonly world: World,
    startS: number,
    startPpm: number,
    state?: SensorState,
  ) {
    const sensors = world.scenario.sensors
    const zeros = () => new Float64Array(sensors.length)
    this.laggedPpm = state ? Float64Array.from(state.laggedPpm) : zeros().fill(startPpm)
    this.mixing = state ? Float64Array.from(state.mixing) : zeros()
    const outdoorC = outdoorTemperatureC(world.seed, startS)
    this.temperatureC = state
      ? Float64Array.from(state.temperatureC)
      : Float64Array.from(sensors, (s) => (s.position === 'outdoor' ? outdoorC : 19))
    this.atPhasePpm = zeros()
    this.before = zeros()
    this.inputPpm = zeros()
    this.zone = Int16Array.from(sensors, (s) => (s.place === null ? -1 : world.zoneIndex.get(s.place)!))
    this.characters = sensors.map((s, i) => characterOf(world.seed, s, i))
    this.out = {
      minute: 0,
      phaseS: Float64Array.from(this.characters, (c) => c.phaseS),
      co2Ppm: zeros(),
      temperatureC: zeros(),
      relativeHumidityPct: zeros(),
    }
  }

  snapshot(): SensorState {
    return {
      laggedPpm: [...this.laggedPpm],
      mixing: [...this.mixing],
      temperatureC: [...this.temperatureC],
    }
  }

  /** Opens a minute: the air at its start, and which air handlers run. */
  begin(minute: number, outdoorPpm: number, co2Ppm: Float64Array, running: Uint8Array): void {
    this.out.minute = minute
    this.outdoorPpm = outdoorPpm
    this.running = running
    this.readInputs(co2Ppm, this.before)
  }

  /** Follows the air through one step that began `fromS` seconds into the minute; keeps the indication at the reporting second. */
  follow(co2Ppm: Float64Array, fromS: number, stepS: number): void {
    this.readInputs(co2Ppm, this.inputPpm)
    this.world.scenario.sensors.forEach(({ model }, i) => {
      const [x0, x1, y] = [this.before[i]!, this.inputPpm[i]!, this.laggedPpm[i]!]
      const until = this.characters[i]!.phaseS - fromS
      if (until >= 0 && until < stepS) {
        const at = x0 + ((x1 - x0) * until) / stepS
        this.atPhasePpm[i] = until === 0 ? y : laggedStep(y, x0, at, until, model.lagS)
      }
      this.laggedPpm[i] = laggedStep(y, x0, x1, stepS, model.lagS)
      this.before[i] = x1
    })
  }

  /** Closes the minute: what each sensor reported in it. */
  finish(): MinuteReadings {
    const { minute } = this.out
    this.world.scenario.sensors.forEach((sensor, i) => {
      this.out.co2Ppm[i] = this.report(sensor, i, minute)
      this.warm(i, minute * 60)
    })
    return this.out
  }

  private readInputs(co2Ppm: Float64Array, into: Float64Array): void {
    this.world.scenario.sensors.forEach((sensor, i) => {
      const zone = this.zone[i]!
      if (zone < 0) into[i] = this.outdoorPpm
      else if (sensor.position === 'supply' && this.running[zone] === 1)
        into[i] = this.outdoorPpm + DUCT_LEAK * (co2Ppm[zone]! - this.outdoorPpm)
      else into[i] = co2Ppm[zone]!
    })
  }

  private report(sensor: SensorPlan, i: number, minute: number): number {
    const { seed, story } = this.world
    const c = this.characters[i]!
    const fresh = normalAt(seed, c.streams.mixing, minute) * Math.sqrt(1 - this.mixingKept ** 2)
    this.mixing[i] = this.mixingKept * this.mixing[i]! + fresh
    if (!reportsAt(seed, story, sensor.deviceId, c, minute)) return Number.NaN
    const excess = Math.max(0, this.atPhasePpm[i]! - this.outdoorPpm)
    const unmixed = this.mixing[i]! * (MIXING_BASE_PPM + MIXING_SHARE * excess)
    const noise = sensor.model.noisePpm * normalAt(seed, c.streams.noise, minute)
    const drift = driftPpm(story, sensor.deviceId, minute * 60)
    const ppm = c.gain * (this.atPhasePpm[i]! + unmixed) + c.offsetPpm + drift + noise
    return indicated(ppm, sensor.model.resolutionPpm, sensor.model.rangeMaxPpm)
  }

  private warm(i: number, timeS: number): void {
    const { seed } = this.world
    const zone = this.zone[i]!
    const outdoorC = outdoorTemperatureC(seed, timeS)
    const excess = Math.max(0, this.laggedPpm[i]! - this.outdoorPpm)
    const heated = this.running[zone] === 1 ? 20.6 : 18.4
    const target = zone < 0 ? outdoorC : heated + Math.min(2.5, excess * 0.0022)
    this.temperatureC[i]! += (target - this.temperatureC[i]!) / WARMING_MEMORY_MIN
    const vapour = 0.72 * saturationGramsPerM3(outdoorC) + VAPOUR_GRAMS_PER_PPM * excess
    const humidity = (100 * vapour) / saturationGramsPerM3(this.temperatureC[i]!)
    const jitter = normalAt(seed, this.characters[i]!.streams.noise + 1, Math.floor(timeS / 60))
    this.out.temperatureC[i] = Math.round(10 * (this.temperatureC[i]! + 0.05 * jitter)) / 10
    this.out.relativeHumidityPct[i] = Math.round(Math.min(98, Math.max(8, humidity + 0.4 * jitter)))
  }
}
