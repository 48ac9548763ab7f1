import type { Knot } from './air'
import { localTimeS } from './calendar'
import { type Draft, draftRoom, type Setting } from './draft'
import { cleaners, guardRound, shifts } from './people'

export type ClassOfRooms = {
  /** what makes these rooms hard, for the table's reader */
  about: string
  draft(setting: Setting): Draft
  /** first day: ISO weekday to start on, or the date itself */
  startWeekday?: number
  startDates?: string[]
  zones?: string[]
}

const HOUR_S = 3600

/** An end that comes after 0.7 to 1 time constant: the logger is switched off, or a night shift moves in. */
function short(setting: Setting): Draft {
  const draft = draftRoom(setting, { rate: [0.5, 2.5], setBack: false, excess: [500, 1300] })
  const powerDown = setting.random.chance(0.5)
  for (const [d, leaveS] of draft.lastLeaveS.entries()) {
    const lengthS = Math.max(1200, (setting.random.uniform(0.7, 1.05) / draft.ratePerHour) * HOUR_S)
    const morningS = localTimeS(setting.zone, setting.dates[d]!, 30)
    if (powerDown) draft.flaws.missing.push({ fromS: leaveS + lengthS, toS: morningS })
    else {
      const persons = Math.max(1, Math.round(draft.persons * 0.3))
      draft.stays.push({ fromS: leaveS + lengthS, toS: morningS, generationLps: 0.0045 * persons, persons })
    }
  }
  return draft
}

function cleaned(setting: Setting): Draft {
  const draft = draftRoom(setting, { rate: [0.5, 3] })
  const { random } = setting
  for (const leaveS of draft.lastLeaveS) {
    if (random.chance(0.85)) draft.stays.push(cleaners(leaveS + random.uniform(1200, 9000), random))
    for (let round = random.integer(0, 3); round > 0; round--)
      draft.stays.push(guardRound(leaveS + random.uniform(0.5, 9) * HOUR_S, random))
  }
  return draft
}

/** The air handler stops (or is reduced) 0.5 to 1.8 time constants after the last person left. */
function shutOff(setting: Setting): Draft {
  const { random } = setting
  const draft = draftRoom(setting, { rate: [1, 4.5], setBack: false, excess: [600, 1400] })
  const low = draft.ratePerHour * random.uniform(0.08, 0.5)
  const stopHour = random.integer(36, 39) / 2
  const knots: Knot[] = [{ fromS: setting.fromS, perHour: low }]
  draft.stays = []
  for (const [d, date] of setting.dates.entries()) {
    const stopS = localTimeS(setting.zone, date, stopHour)
    knots.push({ fromS: localTimeS(setting.zone, date, 6), perHour: draft.ratePerHour })
    knots.push({ fromS: stopS, perHour: low })
    const leaveS = stopS - (random.uniform(0.5, 1.8) / draft.ratePerHour) * HOUR_S
    draft.lastLeaveS[d] = leaveS
    const one = draftRoom(
      { ...setting, dates: [date], random: random.fork(`day ${d}`) },
      { rate: [1, 1.0001] },
    )
    const scale = draft.persons / Math.max(1, one.persons)
    // the day's people, moved so that the last leaves at leaveS, in the numbers that this room holds
    const shiftS = leaveS - one.lastLeaveS[0]!
    for (const stay of one.stays)
      draft.stays.push({
        fromS: stay.fromS + shiftS,
        toS: stay.toS + shiftS,
        generationLps: stay.generationLps * scale,
        persons: stay.persons,
      })
  }
  draft.outdoorRate = knots
  if (random.chance(0.5)) draft.declared.air_handler = 'supply east'
  delete draft.declared.supply_hours
  return draft
}

function drifting(setting: Setting): Draft {
  const draft = draftRoom(setting)
  const { random } = setting
  Object.assign(draft.sensor, {
    gain: random.uniform(0.95, 1.05),
    offsetPpm: random.uniform(-80, 80),
    driftPpmPerDay: random.uniform(-4, 4),
    baselinePpm: random.uniform(4, 15),
    baselinePeriodS: random.uniform(8, 30) * HOUR_S,
  })
  return draft
}

function demand(setting: Setting): Draft {
  const { random } = setting
  const base = random.uniform(0.3, 0.8)
  const perHourPerPpm = random.uniform(1.5, 3.5) / 800
  const draft = draftRoom(setting, { rate: [base + 2, base + 3.2], setBack: false, excess: [700, 1100] })
  draft.outdoorRate = [{ fromS: setting.fromS, perHour: base }]
  draft.ratePerHour = base
  draft.demand = { perHourPerPpm, ceilingPerHour: base + 5 }
  return draft
}

/** A corridor or open area beside the room: larger, slower, with people of its own who leave at another hour. */
function beside(setting: Setting, measured: boolean): Draft {
  const { random } = setting
  const draft = draftRoom(setting, { rate: [0.4, 1.5], excess: [1200, 2800], setBack: false })
  const hall = draftRoom(
    { ...setting, random: random.fork('hall') },
    { rate: [0.3, 0.9], volume: [150, 400], excess: [250, 600], uses: ['office'], setBack: false },
  )
  draft.neighbour = {
    plan: { volumeM3: hall.volumeM3, stays: hall.stays, outdoorRate: hall.outdoorRate, wander: hall.wander },
    rate: [{ fromS: setting.fromS, perHour: draft.ratePerHour * random.uniform(0.5, 2.5) }],
    measured,
  }
  return draft
}

/** Supplied at 3 to 5 per hour with 15 to 40 % outdoor air; the rest returns from the whole building. */
function recirculating(setting: Setting): Draft {
  const { random } = setting
  const supply = random.uniform(3, 5)
  const fraction = random.uniform(0.15, 0.4)
  const draft = draftRoom(setting, { rate: [supply, supply * 1.001], setBack: false, excess: [500, 1200] })
  const rest = draftRoom(
    { ...setting, random: random.fork('rest') },
    {
      rate: [supply * fraction, supply * fraction * 1.001],
      volume: [1500, 4000],
      excess: [200, 450],
      setBack: false,
    },
  )
  draft.outdoorRate = [{ fromS: setting.fromS, perHour: supply * fraction }]
  draft.neighbour = {
    plan: { volumeM3: rest.volumeM3, stays: rest.stays, outdoorRate: rest.outdoorRate, wander: rest.wander },
    rate: [{ fromS: setting.fromS, perHour: supply * (1 - fraction) }],
    measured: false,
  }
  draft.declared.air = random.chance(0.6) ? 'recirculating' : 'unknown'
  return draft
}

/** One thing goes wrong with the logger each evening. */
function broken(setting: Setting): Draft {
  const { random } = setting
  const draft = draftRoom(setting)
  draft.flaws.spikeShare = random.pick([0, 0.003, 0.015])
  draft.flaws.duplicateShare = random.pick([0, 0.03])
  for (const [d, leaveS] of draft.lastLeaveS.entries()) {
    const tau = HOUR_S / draft.ratePerHour
    const startS = leaveS + random.uniform(0.1, 1.2) * tau
    const kind = random.pick(['gap', 'off', 'stuck', 'clock', 'sound'] as const)
    if (kind === 'gap')
      draft.flaws.missing.push({ fromS: startS, toS: startS + random.uniform(0.2, 1) * tau })
    if (kind === 'off')
      draft.flaws.missing.push({
        fromS: leaveS + random.uniform(0, 400),
        toS: localTimeS(setting.zone, setting.dates[d]!, 31),
      })
    if (kind === 'stuck')
      draft.flaws.stuck.push({ fromS: startS, toS: startS + random.uniform(0.5, 2) * Math.max(tau, HOUR_S) })
    if (kind === 'clock') {
      const offByS = random.pick([-3600, -600, 300, 900, 3600])
      draft.flaws.clock.push({ fromS: random.chance(0.5) ? startS : leaveS - 4 * HOUR_S, offByS })
      draft.flaws.clock.push({ fromS: localTimeS(setting.zone, setting.dates[d]!, 33), offByS: 0 })
    }
  }
  return draft
}

function saturated(setting: Setting): Draft {
  const draft = draftRoom(setting, { rate: [0.4, 2], excess: [1800, 3500], sensor: { rangeMaxPpm: 2000 } })
  draft.declared.sensor = { range_max_ppm: 2000, accuracy_ppm: 50, accuracy_pct: 3 }
  return draft
}

function verySlow(setting: Setting): Draft {
  const draft = draftRoom(setting, {
    rate: [0.03, 0.1],
    uses: ['meeting'],
    volume: [60, 200],
    setBack: false,
  })
  const people = setting.random.integer(2, 4)
  const stays = draft.lastLeaveS.map((toS) => ({
    fromS: toS - setting.random.uniform(1.5, 4) * HOUR_S,
    toS,
    generationLps: 0.0048 * people,
    persons: people,
  }))
  return { ...draft, persons: people, stays }
}

function neverEmpty(setting: Setting): Draft {
  const draft = draftRoom(setting, { rate: [0.8, 3] })
  const stays = [-1, ...setting.dates.keys()].flatMap((d) => {
    const date = d < 0 ? setting.dates[0]! : setting.dates[d]!
    const day = shifts(setting.zone, date, draft.persons, setting.random.fork(`shift ${d}`))
    return d < 0 ? day.map((s) => ({ ...s, fromS: s.fromS - 86_400, toS: s.toS - 86_400 })) : day
  })
  return { ...draft, stays }
}

function onChange(setting: Setting): Draft {
  const deadbandPpm = setting.random.pick([15, 20, 30, 50])
  const draft = draftRoom(setting, { sensor: { deadbandPpm, intervalS: 30 }, excess: [600, 1400] })
  draft.declared.sensor = {
    reporting: 'on-change',
    deadband_ppm: deadbandPpm,
    accuracy_ppm: 40,
    accuracy_pct: 3,
  }
  return draft
}

function noisy(setting: Setting): Draft {
  const { random } = setting
  const tenBit = random.chance(0.5)
  const resolutionPpm = tenBit ? 5000 / 1023 : 10
  const draft = draftRoom(setting, {
    sensor: {
      whitePpm: random.uniform(12, 30),
      mixingShare: random.uniform(0.01, 0.025),
      resolutionPpm,
    },
  })
  if (random.chance(0.5))
    draft.declared.sensor = { resolution_ppm: Number(resolutionPpm.toFixed(2)), accuracy_ppm: 50 }
  return draft
}

/** Windows opened for 5 to 20 minutes with people inside: the level falls fast, and it is no test of the empty room. */
function airing(setting: Setting): Draft {
  const { random } = setting
  const draft = draftRoom(setting, { rate: [0.2, 0.8], excess: [1200, 2600], setBack: false })
  const knots: Knot[] = [...draft.outdoorRate]
  for (const date of setting.dates) {
    for (const hour of [10.2, 13.1, 15.2]) {
      const fromS = localTimeS(setting.zone, date, hour + random.uniform(0, 0.8))
      knots.push({ fromS, perHour: random.uniform(4, 10) })
      knots.push({ fromS: fromS + random.uniform(300, 1200), perHour: draft.ratePerHour })
    }
  }
  draft.outdoorRate = knots
  draft.declared.air = 'natural'
  return draft
}

export const CLASSES: Record<string, ClassOfRooms> = {
  clean: { about: 'sound sensor, long evening, one rate', draft: (s) => draftRoom(s, { setBack: false }) },
  noisy: { about: '12–30 ppm noise, 10 ppm or 10-bit steps', draft: noisy },
  short: { about: '0.7–1 time constant before an end', draft: short },
  cleaners: { about: 'cleaners and guards in the evening', draft: cleaned },
  'shut-off': { about: 'supply stops inside the decay', draft: shutOff },
  drift: { about: 'offset, gain, drift, slow baseline', draft: drifting },
  demand: { about: 'rate falls with CO2', draft: demand },
  coupled: { about: 'air from a measured neighbour', draft: (s) => beside(s, true) },
  'coupled-unseen': { about: 'air from a neighbour nobody measures', draft: (s) => beside(s, false) },
  outages: { about: 'gaps, stuck, spikes, clock, power-down', draft: broken },
  'on-change': { about: 'reports on change only', draft: onChange },
  saturated: { about: 'sensor ends at 2000 ppm', draft: saturated },
  recirculating: { about: '15–40 % outdoor air in the supply', draft: recirculating },
  'very-fast': {
    about: '8–14 per hour, sampled every 5 min',
    draft: (s) =>
      draftRoom(s, { rate: [8, 14], intervals: [300], excess: [350, 800], uses: ['meeting', 'classroom'] }),
  },
  'very-slow': { about: 'below 0.1 per hour', draft: verySlow },
  'never-empty': { about: 'people day and night', draft: neverEmpty },
  airing: { about: 'windows opened with people inside', draft: airing },
  dst: {
    about: 'late decays across both clock changes',
    startDates: ['2026-03-26', '2026-10-22'],
    zones: ['Europe/Lisbon', 'Europe/Berlin', 'Europe/Helsinki'],
    draft: (s) => draftRoom(s, { leaveHour: [22.5, 25], rate: [0.3, 1.2], setBack: false }),
  },
  weekend: {
    about: 'empty on Saturday and Sunday',
    startWeekday: 4,
    draft: (s) => draftRoom(s, { weekendEmpty: true }),
  },
  sampling: {
    about: 'every 10 s to every 10 min',
    draft: (s) => draftRoom(s, { intervals: [10, 20, 30, 600, 600] }),
  },
}
