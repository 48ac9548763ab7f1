/** A span of time in the fewest words that matter: "40 s", "12 min", "1 h 05 min", "3 days". */
export function spanWords(seconds: number): string {
  const s = Math.max(0, seconds)
  if (s < 90) return `${Math.round(s)} s`
  const minutes = Math.round(s / 60)
  if (minutes < 60) return `${minutes} min`
  if (minutes < 48 * 60) {
    const rest = minutes % 60
    return rest === 0
      ? `${Math.floor(minutes / 60)} h`
      : `${Math.floor(minutes / 60)} h ${String(rest).padStart(2, '0')} min`
  }
  return `${Math.round(minutes / 1440)} days`
}

/** A running clock, "0:48" or "1:02:30". */
export function clockWords(seconds: number): string {
  const s = Math.max(0, Math.floor(seconds))
  const two = (n: number) => String(n).padStart(2, '0')
  return s < 3600
    ? `${Math.floor(s / 60)}:${two(s % 60)}`
    : `${Math.floor(s / 3600)}:${two(Math.floor(s / 60) % 60)}:${two(s % 60)}`
}
