import type { Metadata } from 'next'
import Link from 'next/link'
import { notFound } from 'next/navigation'
import { Beside, SoFar } from '@/components/decays/Beside'
import { DecayWorkbench } from '@/components/decays/DecayWorkbench'
import { Caution, Crumbs, Page } from '@/components/ui/Page'
import { getDecay } from '@/db/queries/decay-detail'
import { nightWords } from '@/lib/format/nights'
import { spanWords } from '@/lib/format/spans'
import { paths } from '@/lib/paths'
import { can } from '@/lib/policy/permissions'
import { requirePage } from '@/lib/server/http/page'
import { reviewDecayAction } from '../actions'

export const metadata: Metadata = { title: 'Decay' }

/** One decay: the picture, the fit under the hand, the checks, the decision. */
export default async function DecayPage({ params }: { params: Promise<{ decay: string }> }) {
  const page = await requirePage('decay.read')
  const { decay: publicId } = await params
  const decay = await page.read((tx) => getDecay(tx, { publicId }))
  if (!decay) notFound()
  return (
    <Page>
      <Crumbs
        crumbs={[{ word: 'Decays', href: paths.decays() }, { word: `${decay.roomNumber} ${decay.roomName}` }]}
      />
      <p className="mt-3 text-2 text-ink-2">
        <Link href={paths.room(decay.roomId)}>
          {decay.roomNumber} {decay.roomName}
        </Link>{' '}
        · {nightWords(decay.night)} · {decay.sensor}, every {spanWords(decay.intervalS)} ·{' '}
        {decay.modeFrom ? `mode from ${decay.modeFrom}` : 'mode not known'}
      </p>
      <DecayWorkbench
        key={decay.id}
        decay={decay}
        save={can(page.membership.roles, 'decay.review') ? reviewDecayAction : null}
        beside={<Beside decay={decay} />}
        sofar={<SoFar decay={decay} />}
      />
      <Caution>
        One sensor’s estimate of how fast lower-CO2 air replaces this room’s air. Do not occupy or shut a room
        by this figure alone; follow the local code and licensed practice.
      </Caution>
    </Page>
  )
}
