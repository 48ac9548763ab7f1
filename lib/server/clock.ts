/** Where code on the server asks for the time, so that tests may set it. */
export type Clock = { now: () => Date }

export const systemClock: Clock = { now: () => new Date() }
