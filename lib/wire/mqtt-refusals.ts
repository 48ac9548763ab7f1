/** Why a message, one of its items or a connect is refused: a closed list, each with the sentence a person reads. */
export const REFUSAL_REASONS = {
  'wrong-topic': 'published to a topic that is not the device’s own',
  'too-large': 'payload larger than a message may be',
  'bad-json': 'payload is not JSON text in UTF-8',
  'bad-payload': 'payload is neither one reading, a list of readings nor SenML',
  'too-many-items': 'list of more than 500 readings',
  'missing-co2': 'reading without co2_ppm',
  'wrong-type': 'a value is not of the type it must have',
  'implausible-value': 'a value is outside what it can be',
  'wrong-unit': 'a unit that is not understood',
  'bad-time': 'time that cannot be understood',
  'time-in-future': 'time more than 10 minutes ahead',
  'time-too-old': 'time older than 400 days',
  'conflicts-with-stored': 'another value is already stored for this sensor and time',
  'cannot-be-stored': 'the database refused the reading',
  throttled: 'more readings than one sensor may send; they were taken late, none was lost',
  'subscribe-refused': 'tried to subscribe; a device only publishes',
  'unknown-device': 'a device that is not registered',
  'wrong-secret': 'connect with a wrong secret',
  'retired-device': 'a device that is retired',
  'other-client-id': 'connect whose client id is not the device id',
  'too-many-failed-connects': 'connect refused unread after many failures',
  'unsupported-protocol': 'connect with an MQTT version other than 3.1.1',
  'protocol-error': 'bytes that break the MQTT protocol',
} as const

export type RefusalReason = keyof typeof REFUSAL_REASONS

/** One refused item of a message: the reason and what exactly was found, where, and what was expected. */
export type WireRefusal = { reason: RefusalReason; detail: string }

/** A found value in a few words, for a refusal's detail; never walks into a list or an object, which may be nested without end. */
export function shown(value: unknown): string {
  if (typeof value === 'string') return JSON.stringify(value.slice(0, 40))
  if (Array.isArray(value)) return 'a list'
  return typeof value === 'object' && value !== null ? 'an object' : String(value)
}
