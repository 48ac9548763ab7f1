/** Names of the demo's rooms in files: number and name in small letters, such as "202-heddle" (a bare 2.02 would read as a number). */
export function roomKey(zone: { number: string; name: string }): string {
  return `${zone.number.replace('.', '')}-${zone.name.replace(/ /g, '-')}`.toLowerCase()
}
