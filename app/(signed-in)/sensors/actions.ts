'use server'

import { z } from 'zod'
import { registerSensor, renewSecret, retireSensor } from '@/db/changes/sensors'
import { getSite } from '@/db/queries/sensors'
import { Refusal } from '@/lib/errors'
import { sensorForm } from '@/lib/forms/sensor'
import { systemClock } from '@/lib/server/clock'
import { brokerAddress } from '@/lib/server/env'
import { action } from '@/lib/server/http/action'
import { requireBuilding } from '@/lib/server/http/building'
import { topicOf } from '@/lib/wire/topics'

/** What an installer types into the sensor; the secret is shown this once. */
export type Registered = {
  deviceId: string
  secret: string
  topic: string
  broker: { host: string; port: number }
}

const register = action({
  permission: 'sensor.register',
  schema: sensorForm.and(z.object({ building: z.string() })),
  run: async (person, form): Promise<Registered> => {
    const building = await requireBuilding(person, form.building)
    const actor = { organizationId: person.scope.organizationId, userId: person.scope.userId }
    return person.change(async (tx) => {
      const made = await registerSensor(tx, actor, { buildingId: building.id, form, now: systemClock.now() })
      const site = await getSite(tx, { buildingId: building.id })
      return {
        ...made,
        topic: topicOf(site ?? building.slug, made.deviceId, 'readings'),
        broker: brokerAddress(),
      }
    })
  },
})

/** Registers one sensor and answers its secret, once. */
export async function registerSensorAction(input: unknown) {
  return register(input)
}

const deviceOnly = z.object({ deviceId: z.string(), confirm: z.string().optional() })

const renew = action({
  permission: 'sensor.register',
  schema: deviceOnly,
  run: async (person, { deviceId }) => {
    const actor = { organizationId: person.scope.organizationId, userId: person.scope.userId }
    return person.change((tx) => renewSecret(tx, actor, { deviceId }))
  },
})

/** A new secret; the old one stops working at once. */
export async function renewSecretAction(earlier: unknown, form: FormData) {
  return renew(earlier, form)
}

const retire = action({
  permission: 'sensor.register',
  schema: deviceOnly,
  run: async (person, { deviceId, confirm }) => {
    if (confirm?.trim().toLowerCase() !== deviceId.toLowerCase()) {
      throw new Refusal('invalid', 'Type the device id to retire the sensor.', {
        fields: { confirm: [`Type ${deviceId} to confirm.`] },
      })
    }
    const actor = { organizationId: person.scope.organizationId, userId: person.scope.userId }
    await person.change((tx) => retireSensor(tx, actor, { deviceId, now: systemClock.now() }))
    return { deviceId }
  },
})

/** Retires a sensor; its record stays. */
export async function retireSensorAction(earlier: unknown, form: FormData) {
  return retire(earlier, form)
}
