/** Which width drops a column: the narrower the screen, the fewer figures; room, rate, bar and against basis stay. */
export const column = {
  mode: 'max-lg:hidden',
  person: 'max-lg:hidden',
  changed: 'max-md:hidden',
  decays: 'max-md:hidden',
  age: 'max-md:hidden',
  flow: 'max-md:hidden',
  basis: 'max-md:hidden',
  weeks: 'max-md:hidden',
  interval: 'max-sm:hidden',
}
