import { dayPlans } from './people/day-plan'
import { Plant } from './physics/plant'
import { outdoorCo2Ppm } from './physics/weather'
import { ZoneIntegrator } from './physics/zone-network'
import { type MinuteReadings, SensorBank, type SensorState } from './sensing/bank'
import type { World } from './world'

/** Air, people and sensors are followed this long before the first reading, so that the history begins in mid-life. */
const RUN_IN_MIN = 36 * 60
const LEAST_STEPS = 3

/** All that is carried from one minute to the next; plain numbers, exact through JSON. */
export type SimulationState = { minute: number; co2Ppm: number[]; sensors: SensorState }

/**
 * The mill, minute by minute. The state after any minute depends on the seed and the first start alone: whether it was reached
 * in one run or through saved states makes no difference, to the last bit.
 */
export class Simulation {
  private readonly plant: Plant
  private readonly integrator: ZoneIntegrator
  private readonly bank: SensorBank
  private readonly co2Ppm: Float64Array
  private minute: number
  private readonly planOf: ReturnType<typeof dayPlans>

  constructor(
    readonly world: World,
    state?: SimulationState,
  ) {
    this.plant = new Plant(world)
    this.planOf = dayPlans(world)
    this.integrator = new ZoneIntegrator(this.plant.net)
    this.minute = state ? state.minute : Math.floor(world.historyStartS / 60) - RUN_IN_MIN
    const outdoor = outdoorCo2Ppm(world.seed, this.minute * 60)
    this.co2Ppm = Float64Array.from(state ? state.co2Ppm : world.zones.map(() => outdoor + 10))
    this.bank = new SensorBank(world, this.minute * 60, outdoor, state?.sensors)
  }

  /** Epoch minute that the next step will live through. */
  get nextMinute(): number {
    return this.minute
  }

  snapshot(): SimulationState {
    return { minute: this.minute, co2Ppm: [...this.co2Ppm], sensors: this.bank.snapshot() }
  }

  /** Lives through the next minute; the readings taken in it are in the result, which the following step overwrites. */
  step(): MinuteReadings {
    const startS = this.minute * 60
    const { net } = this.plant
    this.plant.setTo(startS)
    net.outdoorPpm = outdoorCo2Ppm(this.world.seed, startS + 30)
    this.breathe(startS)
    const steps = this.integrator.stepsFor(60, LEAST_STEPS)
    this.bank.begin(this.minute, net.outdoorPpm, this.co2Ppm, this.plant.running)
    for (let k = 1; k <= steps; k++) {
      this.integrator.step(this.co2Ppm, 60 / steps)
      this.bank.follow(this.co2Ppm, (60 * (k - 1)) / steps, 60 / steps)
    }
    this.minute += 1
    return this.bank.finish()
  }

  /** Lives on, unread, until the given epoch minute is next. */
  runTo(minute: number): void {
    while (this.minute < minute) this.step()
  }

  private breathe(startS: number): void {
    const { day, minute } = this.world.local.at(startS)
    const { sourceLps } = this.planOf(day)
    const { net } = this.plant
    for (let z = 0; z < net.sourceLps.length; z++) net.sourceLps[z] = sourceLps[z * 1440 + minute]!
  }
}
