import { z } from 'zod'
import {
  FEED_QUANTITIES,
  FEED_TIME_FORMATS,
  FEED_UNITS,
  type FeedMapping,
  type FeedQuantity,
  isTopicFilter,
} from '../wire/feed'
import { isJsonPointer } from '../wire/json-pointer'

const trimmed = (most: number) => z.string().trim().max(most, `Keep it under ${most} signs.`)
const pointer = trimmed(200).refine(
  isJsonPointer,
  'A JSON Pointer begins with / and names one level after the other, e.g. /values/co2.',
)
const optionalPointer = pointer.default('')
const scale = z.preprocess(
  (value) => (value === '' || value === undefined ? 1 : value),
  z.coerce
    .number({ error: 'A number, e.g. 0.1 where tenths are sent.' })
    .refine((value) => value !== 0 && Math.abs(value) <= 1e6, 'Not 0, at most a million.'),
)
const unitsOf = (quantity: FeedQuantity) => Object.keys(FEED_UNITS[quantity]) as [string, ...string[]]
const unit = (quantity: FeedQuantity) => z.enum(unitsOf(quantity)).default(unitsOf(quantity)[0])

/** A feed as an administrator describes it; flat, as a form sends it. Empty pointers mean: not in the messages. */
export const feedForm = z
  .object({
    name: trimmed(80).min(1, 'Say what it is, e.g. “plant room gateway”.'),
    brokerUrl: trimmed(300)
      .refine(
        (text) => /^mqtts?:\/\//.test(text) && URL.canParse(text),
        'An address as mqtt://host:1883 or mqtts://host:8883.',
      )
      .refine(
        (text) => !URL.canParse(text) || (new URL(text).username === '' && new URL(text).password === ''),
        'User name and password have fields of their own.',
      ),
    userName: trimmed(200).default(''),
    password: z.string().max(500, 'Keep it under 500 signs.').default(''),
    caPem: trimmed(20_000)
      .refine(
        (text) => text === '' || text.includes('-----BEGIN CERTIFICATE-----'),
        'A certificate as PEM text begins with -----BEGIN CERTIFICATE-----.',
      )
      .default(''),
    topicFilter: trimmed(500).refine(
      isTopicFilter,
      'Topic levels with / between them; + stands for one level, # for all that follow and only at the end.',
    ),
    items: optionalPointer,
    deviceIn: z.enum(['topic', 'payload'], { error: 'Choose where the device id stands.' }),
    deviceLevel: z.preprocess(
      (value) => (value === '' || value === undefined ? undefined : value),
      z.coerce
        .number({ error: 'A number from 1.' })
        .int('A whole number.')
        .min(1, 'Levels count from 1.')
        .max(50, 'At most 50.')
        .optional(),
    ),
    devicePointer: optionalPointer,
    timePointer: optionalPointer,
    timeFormat: z.enum(FEED_TIME_FORMATS).default('any'),
    co2Pointer: pointer.min(1, 'Say where CO2 stands, e.g. /values/co2.'),
    co2Unit: unit('co2'),
    co2Scale: scale,
    tempPointer: optionalPointer,
    tempUnit: unit('temp'),
    tempScale: scale,
    rhPointer: optionalPointer,
    rhUnit: unit('rh'),
    rhScale: scale,
    batteryPointer: optionalPointer,
    batteryUnit: unit('battery'),
    batteryScale: scale,
    rssiPointer: optionalPointer,
    rssiUnit: unit('rssi'),
    rssiScale: scale,
  })
  .refine((form) => form.deviceIn !== 'topic' || form.deviceLevel !== undefined, {
    path: ['deviceLevel'],
    message: 'Say which level, e.g. 3 in plant/up/dev-7.',
  })
  .refine((form) => form.deviceIn !== 'payload' || form.devicePointer !== '', {
    path: ['devicePointer'],
    message: 'Say where the device id stands, e.g. /device/id.',
  })
  .refine((form) => form.caPem === '' || form.brokerUrl.startsWith('mqtts://'), {
    path: ['caPem'],
    message: 'Only an address that begins with mqtts:// uses a certificate.',
  })

export type FeedForm = z.output<typeof feedForm>

/** The mapping that a checked form describes. */
export function mappingOf(form: FeedForm): FeedMapping {
  const quantity = (name: FeedQuantity) => {
    const at = form[`${name}Pointer`]
    return at === '' ? null : { pointer: at, unit: form[`${name}Unit`], scale: form[`${name}Scale`] }
  }
  const [, temp, rh, battery, rssi] = FEED_QUANTITIES.map(quantity)
  return {
    items: form.items === '' ? null : form.items,
    device:
      form.deviceIn === 'topic' ? { topicLevel: form.deviceLevel ?? 1 } : { pointer: form.devicePointer },
    time: form.timePointer === '' ? null : { pointer: form.timePointer, format: form.timeFormat },
    co2: { pointer: form.co2Pointer, unit: form.co2Unit, scale: form.co2Scale },
    temp: temp ?? null,
    rh: rh ?? null,
    battery: battery ?? null,
    rssi: rssi ?? null,
  }
}
