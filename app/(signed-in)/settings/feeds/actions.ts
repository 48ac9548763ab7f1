'use server'

import { redirect } from 'next/navigation'
import { z } from 'zod'
import { addFeed, removeFeed, switchFeed } from '@/db/changes/feeds'
import { newPublicId } from '@/db/public-id'
import { getFeedSource } from '@/db/queries/feeds'
import { Refusal } from '@/lib/errors'
import { type FeedForm, feedForm, mappingOf } from '@/lib/forms/feed'
import { paths } from '@/lib/paths'
import { systemClock } from '@/lib/server/clock'
import { feedAddress, sealPurpose } from '@/lib/server/feeds/address'
import { tryFeed } from '@/lib/server/feeds/try'
import { action } from '@/lib/server/http/action'
import { requireBuilding } from '@/lib/server/http/building'
import { parseBrokerUrl } from '@/lib/server/mqtt/address'
import { seal, secretKey } from '@/lib/server/seal'

const newFeed = feedForm.and(z.object({ building: z.string() }))
const orNull = (text: string) => (text === '' ? null : text)

const save = action({
  permission: 'settings.manage',
  schema: newFeed,
  run: async (person, form): Promise<{ id: string }> => {
    const building = await requireBuilding(person, form.building)
    const { organizationId, userId } = person.scope
    const publicId = newPublicId()
    const passwordSealed =
      form.password === '' ? null : seal(form.password, sealPurpose(publicId), secretKey())
    await person.change((tx) =>
      addFeed(
        tx,
        { organizationId, userId },
        {
          publicId,
          buildingId: building.id,
          name: form.name,
          brokerUrl: form.brokerUrl,
          userName: orNull(form.userName),
          passwordSealed,
          caPem: orNull(form.caPem),
          topicFilter: form.topicFilter,
          mapping: mappingOf(form),
          now: systemClock.now(),
        },
      ),
    )
    return { id: publicId }
  },
})

/** Keeps a described feed, switched off. */
export async function saveFeedAction(input: unknown) {
  return save(input)
}

/** Where the form says the broker is; the words of a fault stand at its field. */
function addressOf(form: FeedForm) {
  try {
    const address = parseBrokerUrl(form.brokerUrl, form.caPem === '' ? undefined : form.caPem)
    return {
      ...address,
      userName: form.userName === '' ? undefined : form.userName,
      password: form.password === '' ? undefined : form.password,
    }
  } catch (error) {
    throw new Refusal('invalid', (error as Error).message, {
      fields: { brokerUrl: [(error as Error).message] },
    })
  }
}

const tryNew = action({
  permission: 'settings.manage',
  schema: newFeed,
  run: async (person, form) => {
    const building = await requireBuilding(person, form.building)
    return tryFeed({
      address: addressOf(form),
      topicFilter: form.topicFilter,
      mapping: mappingOf(form),
      buildingId: building.id,
    })
  },
})

/** Listens to a described feed for up to ten seconds; stores nothing. */
export async function tryNewFeedAction(input: unknown) {
  return tryNew(input)
}

const gone = 'There is no such feed, or it is not yours to change.'

const tryOne = action({
  permission: 'settings.manage',
  schema: z.object({ id: z.string() }),
  run: async (person, { id }) => {
    const source = await person.read((tx) => getFeedSource(tx, { publicId: id }))
    if (!source) throw new Refusal('not-found', gone)
    const { topicFilter, mapping, buildingId } = source
    return tryFeed({ address: feedAddress(source), topicFilter, mapping, buildingId })
  },
})

/** Listens to a kept feed for up to ten seconds, with a session of its own; stores nothing. */
export async function tryFeedAction(input: unknown) {
  return tryOne(input)
}

const turn = action({
  permission: 'settings.manage',
  schema: z.object({ id: z.string(), enabled: z.boolean() }),
  run: async (person, { id, enabled }) => {
    const { organizationId, userId } = person.scope
    const change = { publicId: id, enabled, now: systemClock.now() }
    await person.change((tx) => switchFeed(tx, { organizationId, userId }, change))
    return { enabled }
  },
})

/** Switches a feed on or off. */
export async function switchFeedAction(input: unknown) {
  return turn(input)
}

const remove = action({
  permission: 'settings.manage',
  schema: z.object({ id: z.string(), name: z.string() }),
  run: async (person, { id, name }) => {
    const { organizationId, userId } = person.scope
    await person.change((tx) => removeFeed(tx, { organizationId, userId }, { publicId: id, name }))
    redirect(paths.feeds())
  },
})

/** Takes a feed away; what it brought stays. */
export async function removeFeedAction(earlier: unknown, form: FormData) {
  return remove(earlier, form)
}
