import { localClock } from '@/lib/time'

/** Minutes after local midnight of an instant. */
export function clockMinutes(at: Date, timeZone: string): number {
  return minutesOf(localClock(at.getTime() / 1000, timeZone))
}

/** Minutes after midnight of "HH:MM". */
export function minutesOf(clock: string): number {
  const [hours, minutes] = clock.split(':').map(Number) as [number, number]
  return hours * 60 + minutes
}

/** "HH:MM" of minutes after midnight, to the nearest five. */
export function roundClock(minutes: number): string {
  const rounded = Math.round(minutes / 5) * 5
  return `${String(Math.floor(rounded / 60) % 24).padStart(2, '0')}:${String(rounded % 60).padStart(2, '0')}`
}
