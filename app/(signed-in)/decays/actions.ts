'use server'

import { redirect } from 'next/navigation'
import { type Refit, reviewDecay } from '@/db/changes/reviews'
import { getDecay } from '@/db/queries/decay-detail'
import { listDecays } from '@/db/queries/decays'
import { refitDecay } from '@/lib/air/decay/refit'
import { Refusal } from '@/lib/errors'
import { type ReviewForm, reviewForm } from '@/lib/forms/review'
import { paths } from '@/lib/paths'
import { systemClock } from '@/lib/server/clock'
import { action } from '@/lib/server/http/action'
import { pageContext } from '@/lib/server/http/page'
import type { SignedContext } from '@/lib/server/http/signed'
import type { DecayDetail } from '@/lib/wire/decays'

const review = action({
  permission: 'decay.review',
  schema: reviewForm,
  run: async (person, form) => {
    const decay = await person.read((tx) => getDecay(tx, { publicId: form.decayId }))
    if (!decay) throw new Refusal('not-found', 'There is no such decay, or it is not yours to see.')
    const refit = form.decision === 'keep with window' ? refitOf(decay, form) : null
    const actor = { organizationId: person.scope.organizationId, userId: person.scope.userId }
    await person.change((tx) => reviewDecay(tx, actor, { form, refit, now: systemClock.now() }))
    return nextToReview(person)
  },
})

/** Saves a decision and goes on to the next decay that waits for one. */
export async function reviewDecayAction(earlier: unknown, form: FormData) {
  const answer = await review(earlier, form)
  if (answer.ok) redirect(answer.value)
  return answer
}

/** The moved window fitted on the server from the readings; what a browser says of it is not taken. */
function refitOf(decay: DecayDetail, form: ReviewForm): Refit {
  const result = refitDecay({
    series: { timeS: Float64Array.from(decay.series.timeS), co2Ppm: Float64Array.from(decay.series.co2Ppm) },
    fromS: form.fromS ?? decay.startS,
    toS: form.toS ?? decay.endS,
    background: decay.background && { ...decay.background, origin: decay.background.origin as never },
    sensor: decay.sensorSpec,
  })
  if (result.ratePerHour === null || result.lowPerHour === null || result.highPerHour === null) {
    throw new Refusal(
      'invalid',
      `This window gives no figure. ${result.sentence} Move its edges, or leave the decay out.`,
      {
        fields: { reason: ['Nothing was saved: this window gives no figure.'] },
      },
    )
  }
  return { rate: result.ratePerHour, low: result.lowPerHour, high: result.highPerHour }
}

async function nextToReview(person: SignedContext): Promise<string> {
  const building = (await pageContext())?.building
  if (!building) return paths.decays()
  const [next] = await person.read((tx) =>
    listDecays(tx, { buildingId: building.id, show: 'to review', sinceNight: '1970-01-01', limit: 1 }),
  )
  return next ? paths.decay(next.id) : paths.decays()
}
