import type { Database } from '@/db/client'
import { type BoardPlan, type BoardReading, listBoardReadings, readBoardPlan } from '@/db/queries/board'
import { type LiveReading, readFromS } from '@/lib/air/room-state'
import { localDate, localDayBounds } from '@/lib/time'
import type { Board, BoardChange } from '@/lib/wire/live-board'
import type { Clock } from '../clock'
import { boardOf } from './board-of'

/** Late readings up to this old are taken in at every notice; older ones at the next full reading. */
const OVERLAP_S = 900
const PLAN_EVERY_S = 60
const FULL_EVERY_S = 300

/**
 * One building's board as this process knows it: plan and today's readings of its lead sensors, read as the system and filtered for
 * each reader afterwards. One reading at a time; a notice adds only what is new.
 */
export class BuildingBoard {
  private plan: BoardPlan | undefined
  private series = new Map<number, LiveReading[]>()
  private planReadS = 0
  private fullReadS = 0
  private board: Board | undefined
  private running: Promise<Board | undefined> | undefined

  constructor(
    private readonly buildingId: number,
    private readonly database: Database,
    private readonly clock: Clock,
  ) {}

  /** Forgets what was read, so that the next refresh reads everything again. */
  invalidate(what: 'all' | 'plan' = 'all'): void {
    this.planReadS = 0
    if (what === 'all') this.fullReadS = 0
  }

  /** The board as last computed, without asking the database. */
  get last(): Board | undefined {
    return this.board
  }

  /** Reads what is new and computes the board; callers that come meanwhile share the run. Undefined where there is no such building. */
  refresh(): Promise<Board | undefined> {
    this.running ??= this.read().finally(() => {
      this.running = undefined
    })
    return this.running
  }

  /** Computes the board anew from what is known, for states that time alone changes. */
  recompute(): Board | undefined {
    if (!this.plan) return undefined
    this.board = boardOf(this.plan, this.series, this.nowS())
    return this.board
  }

  private nowS(): number {
    return this.clock.now().getTime() / 1000
  }

  private async read(): Promise<Board | undefined> {
    const nowS = this.nowS()
    await this.database.asSystem('live board', async (tx) => {
      if (!this.plan || nowS - this.planReadS > PLAN_EVERY_S) {
        this.plan = await readBoardPlan(tx, { buildingId: this.buildingId })
        this.planReadS = nowS
      }
      if (!this.plan) return
      const today = localDayBounds(localDate(nowS, this.plan.building.timeZone), this.plan.building.timeZone)
      const wantedS = readFromS(nowS, today.startS)
      const full = nowS - this.fullReadS > FULL_EVERY_S
      const sinceS = full ? wantedS : nowS - OVERLAP_S
      const readings = await listBoardReadings(tx, { buildingId: this.buildingId, sinceS })
      this.take(readings, sinceS, wantedS)
      if (full) this.fullReadS = nowS
    })
    return this.recompute()
  }

  /** Puts what was read since `sinceS` in the place of what was known of that time. */
  private take(readings: readonly BoardReading[], sinceS: number, wantedS: number): void {
    const kept = new Map<number, LiveReading[]>()
    for (const [sensorId, known] of this.series) {
      kept.set(
        sensorId,
        known.filter(({ timeS }) => timeS >= wantedS && timeS < sinceS),
      )
    }
    for (const { sensorId, timeS, co2Ppm } of readings) {
      const list = kept.get(sensorId) ?? []
      list.push({ timeS, co2Ppm })
      kept.set(sensorId, list)
    }
    this.series = kept
  }
}

/** What differs between two boards; null where a reader would see no difference. */
export function changeBetween(before: Board | undefined, after: Board): BoardChange | null {
  const known = new Map(before?.rooms.map((room) => [room.id, JSON.stringify(room)]))
  const rooms = after.rooms.filter((room) => known.get(room.id) !== JSON.stringify(room))
  const { atS, outdoor, lastReadingS } = after
  const same = before && before.lastReadingS === lastReadingS && before.outdoor.ppm === outdoor.ppm
  return rooms.length === 0 && same ? null : { atS, outdoor, lastReadingS, rooms }
}

/** Do two boards hold the same rooms and floors? If not, a reader must read the snapshot again. */
export function samePlan(before: Board, after: Board): boolean {
  const names = (board: Board) =>
    JSON.stringify([
      board.floors,
      board.rooms.map(({ id, floorId, name, number }) => [id, floorId, name, number]),
    ])
  return names(before) === names(after)
}
