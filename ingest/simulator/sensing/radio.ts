/** What a sensor says of itself: its battery falls one hundredth in three weeks, its signal is that of its place. */
export function batteryPct(sinceStartS: number, order: number): number {
  return Math.max(12, Math.round(99 - (order % 7) - sinceStartS / (21 * 86400)))
}

/** Received signal strength, dBm. */
export function signalDbm(order: number): number {
  return -51 - ((order * 7) % 31)
}
