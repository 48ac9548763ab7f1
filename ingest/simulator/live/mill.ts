import { batteryPct, signalDbm } from '../sensing/radio'
import { Simulation, type SimulationState } from '../simulation'
import type { World } from '../world'
import type { ReadingMessage, SensorClient } from './sensor-client'

/** Reads the time and is called back as it passes; a test may put a faster clock in its place. */
export type LiveClock = { nowS: () => number; every: (fn: () => void) => () => void }

/** The wall clock, run `speed` times as fast from the moment it is made (1 in service). */
export function wallClock(speed = 1, startS = Date.now() / 1000): LiveClock {
  const zeroMs = performance.now()
  return {
    nowS: () => startS + ((performance.now() - zeroMs) / 1000) * speed,
    every: (fn) => {
      const timer = setInterval(fn, Math.max(20, 1000 / speed))
      return () => clearInterval(timer)
    },
  }
}

type Due = { timeS: number; sensor: number; message: ReadingMessage }

/** The mill from a saved state on: lives each minute as it begins and hands every reading to its sensor at its second. */
export class LiveMill {
  private readonly simulation: Simulation
  private readonly due: Due[] = []
  private stopClock: (() => void) | null = null

  constructor(
    private readonly world: World,
    state: SimulationState,
    /** by the plan's sensors; null for those that are off the air */
    private readonly clients: readonly (SensorClient | null)[],
    private readonly clock: LiveClock,
    private readonly onHour: (state: SimulationState) => void = () => undefined,
  ) {
    this.simulation = new Simulation(world, state)
  }

  start(): void {
    this.stopClock = this.clock.every(() => this.catchUp())
    this.catchUp()
  }

  stop(): SimulationState {
    this.stopClock?.()
    this.stopClock = null
    return this.simulation.snapshot()
  }

  /** Lives up to the present; what a sleeping machine missed is taken up in order, so that the record has no gap. */
  catchUp(): void {
    const nowS = this.clock.nowS()
    while (this.simulation.nextMinute * 60 <= nowS) {
      if (this.simulation.nextMinute % 60 === 0) this.onHour(this.simulation.snapshot())
      this.liveMinute()
    }
    let ready = 0
    while (ready < this.due.length && this.due[ready]!.timeS <= nowS) ready += 1
    for (const { sensor, message } of this.due.splice(0, ready)) this.clients[sensor]?.take(message)
  }

  private liveMinute(): void {
    const minute = this.simulation.step()
    const coming: Due[] = []
    minute.co2Ppm.forEach((co2Ppm, sensor) => {
      if (Number.isNaN(co2Ppm) || this.clients[sensor] === null) return
      const timeS = minute.minute * 60 + minute.phaseS[sensor]!
      const message = {
        t: new Date(timeS * 1000).toISOString().replace('.000Z', 'Z'),
        co2_ppm: co2Ppm,
        temp_c: minute.temperatureC[sensor]!,
        rh_pct: minute.relativeHumidityPct[sensor]!,
        battery_pct: batteryPct(timeS - this.world.historyStartS, sensor),
        rssi_dbm: signalDbm(sensor),
      }
      coming.push({ timeS, sensor, message })
    })
    this.due.push(...coming.sort((a, b) => a.timeS - b.timeS))
  }
}
