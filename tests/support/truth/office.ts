import type { Knot } from './air'
import { localTimeS } from './calendar'
import type { ClassOfRooms } from './classes'
import { type Draft, draftRoom, type Setting, type Wish } from './draft'
import type { Stay } from './people'

/** What a careful analyst would have of such an evening. */
export type Expectation =
  /** a figure, and a right one */
  | 'figure'
  /** no accepted figure at all */
  | 'silence'
  /** a figure or none, but never a wrong one */
  | 'care'

export type Story = { about: string; expect: Expectation; draft(setting: Setting): Draft }

const HOUR_S = 3600

/** A one-minute office room; every story starts from it. */
function officeRoom(setting: Setting, wish: Wish = {}): Draft {
  return draftRoom(setting, {
    intervals: [60],
    uses: ['office'],
    rate: [0.7, 2.2],
    excess: [600, 1200],
    setBack: false,
    leaveHour: [17, 18],
    ...wish,
  })
}

const group = (fromS: number, toS: number, persons: number): Stay => ({
  fromS,
  toS,
  generationLps: 0.0048 * persons,
  persons,
})

/** The same rate all day but for steps at given hours, every day. */
function stepped(setting: Setting, usual: number, steps: readonly (readonly [number, number])[]): Knot[] {
  const knots: Knot[] = [{ fromS: setting.fromS, perHour: usual }]
  for (const date of setting.dates)
    for (const [hour, perHour] of steps) knots.push({ fromS: localTimeS(setting.zone, date, hour), perHour })
  return knots
}

function nearlyNobody(setting: Setting): Draft {
  const draft = officeRoom(setting, { volume: [250, 320], rate: [1.5, 2.5] })
  const stays = setting.dates.map((date) =>
    group(
      localTimeS(setting.zone, date, 10),
      localTimeS(setting.zone, date, 16.5 + setting.random.uniform(0, 1)),
      1,
    ),
  )
  return { ...draft, stays }
}

/** People go home one by one over four hours; the last one alone leaves next to nothing to ebb away. */
function oneByOne(setting: Setting): Draft {
  const draft = officeRoom(setting, { volume: [150, 220], rate: [1.2, 2.2] })
  const stays = setting.dates.flatMap((date) =>
    Array.from({ length: draft.persons }, (_, k) => {
      const toHour = 15.2 + (4.6 * k) / draft.persons + setting.random.uniform(0, 0.3)
      return group(localTimeS(setting.zone, date, 8.5 + 0.03 * k), localTimeS(setting.zone, date, toHour), 1)
    }),
  )
  return { ...draft, stays }
}

function highZero(setting: Setting): Draft {
  const draft = officeRoom(setting)
  draft.sensor.offsetPpm = setting.random.uniform(260, 300)
  return draft
}

function rateFalls(setting: Setting): Draft {
  const draft = officeRoom(setting, { rate: [1.5, 2.5], leaveHour: [17.4, 17.6] })
  const low = draft.ratePerHour * setting.random.uniform(0.15, 0.3)
  return {
    ...draft,
    outdoorRate: stepped(setting, draft.ratePerHour, [
      [6, draft.ratePerHour],
      [18.4, low],
    ]),
  }
}

function purge(setting: Setting): Draft {
  const draft = officeRoom(setting, { rate: [0.4, 0.7], leaveHour: [17.4, 17.6], excess: [900, 1500] })
  const high = draft.ratePerHour * setting.random.uniform(4, 7)
  return {
    ...draft,
    outdoorRate: stepped(setting, draft.ratePerHour, [
      [6, draft.ratePerHour],
      [20, high],
      [22, draft.ratePerHour],
    ]),
  }
}

function comesBack(setting: Setting): Draft {
  const draft = officeRoom(setting)
  for (const leaveS of draft.lastLeaveS) {
    const backS = leaveS + setting.random.uniform(0.35, 0.8) * HOUR_S
    draft.stays.push(group(backS, backS + setting.random.uniform(0.4, 1) * HOUR_S, 2))
  }
  return draft
}

/** Windows opened for a quarter of an hour at 17:00 while a shift works on until the morning. */
function windowWithPeople(setting: Setting): Draft {
  const draft = officeRoom(setting, { rate: [0.5, 0.9], excess: [900, 1500] })
  const steps = [
    [17, setting.random.uniform(5, 9)],
    [17.3, draft.ratePerHour],
  ] as const
  const stays = setting.dates.flatMap((date) =>
    Array.from({ length: draft.persons }, (_, k) =>
      group(localTimeS(setting.zone, date, 9 + 0.02 * k), localTimeS(setting.zone, date, 31 + 0.02 * k), 1),
    ),
  )
  return { ...draft, stays, outdoorRate: stepped(setting, draft.ratePerHour, steps) }
}

/** The air handler is off at night and the building's air drifts in: the level settles well above outdoors, and rises again. */
function buildingBehind(setting: Setting): Draft {
  const draft = officeRoom(setting, { rate: [0.15, 0.3], excess: [1500, 3000] })
  const plan = {
    volumeM3: 2500,
    stays: setting.dates.map((date) =>
      group(localTimeS(setting.zone, date, 8), localTimeS(setting.zone, date, 29), 60),
    ),
    outdoorRate: [{ fromS: setting.fromS, perHour: 0.8 }],
    wander: draft.wander,
  }
  return { ...draft, neighbour: { plan, rate: [{ fromS: setting.fromS, perHour: 1.2 }], measured: false } }
}

/** The evenings that a real office's record is made of, each told in words. */
export const STORIES: Record<string, Story> = {
  plain: {
    about: 'everybody leaves, the level ebbs to outdoors',
    expect: 'figure',
    draft: (s) => officeRoom(s),
  },
  'nearly nobody': { about: 'one person in a large room', expect: 'silence', draft: nearlyNobody },
  'one by one': { about: 'people leave over four hours', expect: 'care', draft: oneByOne },
  'high zero': { about: 'the sensor reads 700 ppm when empty', expect: 'figure', draft: highZero },
  'rate falls': { about: 'supply set down an hour after', expect: 'figure', draft: rateFalls },
  purge: { about: 'a purge from 20:00 to 22:00', expect: 'figure', draft: purge },
  'comes back': { about: 'two people return for a while', expect: 'care', draft: comesBack },
  'window, people in': {
    about: 'aired while a late shift works on',
    expect: 'silence',
    draft: windowWithPeople,
  },
  'building behind': {
    about: 'occupied building leaks in, air unknown',
    expect: 'care',
    draft: buildingBehind,
  },
  'everything off': {
    about: 'logger off 5 min after they leave',
    expect: 'silence',
    draft: (s) => loggerOff(s),
  },
}

function loggerOff(setting: Setting): Draft {
  const draft = officeRoom(setting)
  draft.flaws.missing = draft.lastLeaveS.map((leaveS, d) => ({
    fromS: leaveS + 300,
    toS: localTimeS(setting.zone, setting.dates[d]!, 30),
  }))
  return draft
}

/** An office with one room to each story. */
export const OFFICE: ClassOfRooms = {
  about: 'hand-made evenings of an office at one-minute steps',
  draft: (setting) => Object.values(STORIES)[setting.index % Object.keys(STORIES).length]!.draft(setting),
}
