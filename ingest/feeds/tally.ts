import { CANDIDATES_MAX, type FeedProgress } from '@/db/changes/feeds'

type Candidate = { deviceId: string; messages: number; firstMs: number; lastMs: number; co2Ppm: number }

/** Counts of one feed since they were last written. */
export class Tally {
  #messages = 0
  #readings = 0
  #refusals = 0
  #lastMessageMs: number | null = null
  #connectedMs: number | null | undefined
  #error: { text: string; atMs: number } | null = null
  #candidates = new Map<string, Candidate>()

  /** A message that was taken (its readings and refusals are committed). */
  message(count: { readings: number; refusals: number }, atMs: number): void {
    this.#messages++
    this.#readings += count.readings
    this.#refusals += count.refusals
    this.#lastMessageMs = atMs
  }

  /** A device id that nobody has registered. */
  candidate(deviceId: string, co2Ppm: number, atMs: number): void {
    const held = this.#candidates.get(deviceId)
    if (held) {
      held.messages++
      held.lastMs = atMs
      held.co2Ppm = co2Ppm
    } else if (this.#candidates.size < CANDIDATES_MAX)
      this.#candidates.set(deviceId, { deviceId, messages: 1, firstMs: atMs, lastMs: atMs, co2Ppm })
  }

  connected(atMs: number): void {
    this.#connectedMs = atMs
  }

  lost(text: string, atMs: number): void {
    this.#connectedMs = null
    this.#error = { text, atMs }
  }

  /** Takes everything out, or undefined where there is nothing. */
  take(feedId: number): FeedProgress | undefined {
    const isEmpty =
      this.#messages === 0 && this.#connectedMs === undefined && !this.#error && this.#candidates.size === 0
    if (isEmpty) return undefined
    const progress: FeedProgress = {
      feedId,
      messages: this.#messages,
      readings: this.#readings,
      refusals: this.#refusals,
      lastMessageMs: this.#lastMessageMs,
      connectedMs: this.#connectedMs,
      error: this.#error,
      candidates: [...this.#candidates.values()],
    }
    this.#messages = 0
    this.#readings = 0
    this.#refusals = 0
    this.#lastMessageMs = null
    this.#connectedMs = undefined
    this.#error = null
    this.#candidates = new Map()
    return progress
  }
}
