import { dateOf, weekdayOf } from '../local-time'
import type { AirHandlerPlan, Closure, FloorPlan, TenancyPlan } from './types'

const WEEKDAYS = [1, 2, 3, 4, 5]

export const organization = { publicId: 'demo-tern-alder', name: 'Tern & Alder Estates' }

export const building = {
  slug: 'sallow-mill',
  name: 'Sallow Mill',
  timeZone: 'Europe/London',
  altitudeM: 85,
  openFrom: '07:30',
  openTo: '19:00',
}

export const floors: readonly FloorPlan[] = [
  { key: 'ground', name: 'Ground floor', ordinal: 0 },
  { key: 'first', name: 'First floor', ordinal: 1 },
  { key: 'second', name: 'Second floor', ordinal: 2 },
]

export const airHandlers: readonly AirHandlerPlan[] = [
  {
    code: 'AH-1',
    name: 'Ground floor air handler',
    airSystem: 'outdoor',
    outdoorFraction: 1,
    hours: [{ days: WEEKDAYS, from: '06:30', to: '21:00' }],
  },
  {
    code: 'AH-2',
    name: 'First floor air handler',
    airSystem: 'outdoor',
    outdoorFraction: 1,
    hours: [{ days: WEEKDAYS, from: '07:00', to: '19:00' }],
  },
  {
    code: 'AH-3',
    name: 'Second floor air handler',
    airSystem: 'outdoor',
    outdoorFraction: 1,
    hours: [{ days: WEEKDAYS, from: '07:00', to: '19:00' }],
  },
  {
    code: 'AH-4',
    name: 'Office air handler, with return air',
    airSystem: 'recirculating',
    outdoorFraction: 0.35,
    hours: [{ days: WEEKDAYS, from: '07:00', to: '19:30' }],
  },
  {
    code: 'AH-5',
    name: 'Library unit',
    airSystem: 'outdoor',
    outdoorFraction: 1,
    hours: [{ days: WEEKDAYS, from: '07:00', to: '18:00' }],
  },
]

export const tenancies: readonly TenancyPlan[] = [
  {
    key: 'weir',
    name: 'Weir Learning',
    digestEmails: ['tenant@weir-learning.example'],
    hours: [{ days: WEEKDAYS, from: '08:30', to: '20:45' }],
  },
  {
    key: 'cardroom',
    name: 'Cardroom Studios',
    digestEmails: ['studio.manager@cardroom.example'],
    hours: [{ days: WEEKDAYS, from: '08:00', to: '18:30' }],
  },
  {
    key: 'bobbin',
    name: 'Bobbin Press',
    digestEmails: ['office@bobbin-press.example'],
    hours: [{ days: WEEKDAYS, from: '08:30', to: '18:30' }],
  },
  {
    key: 'skein',
    name: 'Skein Partners',
    digestEmails: ['people@skein-partners.example'],
    hours: [{ days: WEEKDAYS, from: '08:30', to: '18:30' }],
  },
]

/** One day's shut-down five weeks before the first start (its Wednesday), and the year's end of the years around. */
export function closuresAround(firstDay: number): Closure[] {
  const back = firstDay - 35
  const wednesday = back - (weekdayOf(back) - 3)
  const year = Number(dateOf(firstDay).slice(0, 4))
  const yearEnds = [year - 1, year, year + 1].map((y) => ({
    name: 'Year-end closure',
    fromDate: `${y}-12-24`,
    toDate: `${y + 1}-01-01`,
  }))
  return [
    { name: 'Electrical inspection, building shut', fromDate: dateOf(wednesday), toDate: dateOf(wednesday) },
    ...yearEnds,
  ]
}
