import { z } from 'zod'
import { POSITIONS } from '../wire/sensors'
import { isDeviceId } from '../wire/topics'

const optionalNumber = (from: number, to: number, words: string) =>
  z.preprocess(
    (value) => (value === '' || value === undefined ? undefined : value),
    z.coerce.number({ error: words }).min(from, words).max(to, words).optional(),
  )

/** Registering one sensor: what it is, where it hangs, how it reports. */
export const sensorForm = z
  .object({
    deviceId: z
      .string()
      .trim()
      .min(1, 'Scan or type the device id that is printed on the sensor.')
      .refine(isDeviceId, 'A device id has 1 to 64 letters, digits, dots, colons, hyphens or underscores.'),
    label: z
      .string()
      .trim()
      .min(1, 'Say where it hangs, e.g. “wall, by the door”.')
      .max(80, 'Keep it under 80 signs.'),
    position: z.enum(POSITIONS, { error: 'Choose what air the sensor sees.' }),
    roomId: z.preprocess((value) => (value === '' ? undefined : value), z.string().optional()),
    lead: z.preprocess((value) => value === true || value === 'on' || value === 'true', z.boolean()),
    intervalS: z.coerce
      .number({ error: 'Give the reporting interval in seconds.' })
      .int('Whole seconds, please.')
      .min(5, 'At least 5 seconds.')
      .max(3600, 'At most one hour (3600 seconds).')
      .default(60),
    reporting: z.enum(['interval', 'on-change']).default('interval'),
    deadbandPpm: optionalNumber(1, 500, 'The deadband is 1 to 500 ppm.'),
    accuracyPpm: optionalNumber(0, 500, 'The accuracy is 0 to 500 ppm.'),
    accuracyPct: optionalNumber(0, 50, 'The accuracy is 0 to 50 % of the reading.'),
    resolutionPpm: optionalNumber(0.01, 100, 'The resolution is 0.01 to 100 ppm.'),
    rangeMaxPpm: optionalNumber(1000, 50_000, 'The top of the range is 1000 to 50 000 ppm.'),
  })
  .refine((form) => form.position === 'outdoor' || form.roomId !== undefined, {
    path: ['roomId'],
    message: 'Choose the room it hangs in.',
  })
export type SensorForm = z.infer<typeof sensorForm>
