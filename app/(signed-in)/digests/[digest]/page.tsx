import type { Metadata } from 'next'
import { notFound } from 'next/navigation'
import { DigestRooms } from '@/components/digests/DigestRooms'
import { SendNow } from '@/components/digests/SendNow'
import { Crumbs, MarginSection, Page, WithMargin } from '@/components/ui/Page'
import { PrintButton } from '@/components/ui/PrintButton'
import { getDigest, listDeliveries } from '@/db/queries/digests'
import { counted, sentenceCase } from '@/lib/format/counts'
import { paths } from '@/lib/paths'
import { can } from '@/lib/policy/permissions'
import { requirePage } from '@/lib/server/http/page'
import { digestContentSchema } from '@/lib/wire/digests'
import { sendDigestAction } from '../actions'

export const metadata: Metadata = { title: 'Weekly letter' }

/** One week of one tenancy: a letter. */
export default async function DigestPage({ params }: { params: Promise<{ digest: string }> }) {
  const page = await requirePage('digest.read')
  const { digest: publicId } = await params
  const found = await page.read(async (tx) => {
    const row = await getDigest(tx, { publicId })
    return row && { ...row, deliveries: await listDeliveries(tx, { digestId: row.digest.id }) }
  })
  if (!found) notFound()
  const digest = digestContentSchema.parse(found.digest.content)
  const receivers = found.tenancy.digestEmails.length
  const sent = found.deliveries.filter((delivery) => delivery.state === 'sent').length
  const failed = found.deliveries.filter((delivery) => delivery.state === 'failed').length
  const maySend = can(page.membership.roles, 'digest.send')
  return (
    <Page className="max-w-[1120px]">
      <Crumbs crumbs={[{ word: 'Digests', href: paths.digests() }, { word: digest.weekWords }]} />
      <WithMargin
        margin={
          <>
            {digest.beingDone.length > 0 && (
              <MarginSection title="What is being done">
                <ul className="text-2">
                  {digest.beingDone.map((item) => (
                    <li
                      key={`${item.subject} ${item.sentence}`}
                      className="border-t border-rule py-2 first:border-t-0"
                    >
                      <b className="block">{item.subject}</b>
                      {item.sentence}
                    </li>
                  ))}
                </ul>
              </MarginSection>
            )}
            <MarginSection title="Who gets this letter">
              <p className="text-2 text-ink-2">
                {receivers === 0
                  ? 'Nobody is entered yet.'
                  : `${sentenceCase(counted(receivers, 'person', 'people'))} at ${found.tenancy.name}, every Monday. Sent to ${sent} so far${failed > 0 ? `, ${failed} failed` : ''}.`}
              </p>
              {maySend && <SendNow digestId={publicId} receivers={receivers} send={sendDigestAction} />}
            </MarginSection>
            <MarginSection title="How sure this is">
              {digest.cautions.map((caution) => (
                <p key={caution} className="mt-1 text-2 text-ink-2">
                  {caution}
                </p>
              ))}
            </MarginSection>
          </>
        }
      >
        <h1 className="mt-3 max-w-[20em] text-[38px] leading-[1.15] max-sm:text-[29px]">{digest.title}</h1>
        {digest.lead.map((sentence) => (
          <p key={sentence} className="mt-3 max-w-[34em] text-5 font-[380]">
            {sentence}
          </p>
        ))}
        {digest.goodToKnow && <p className="mt-3 max-w-[34em] text-ink-2">{digest.goodToKnow}</p>}
        <div className="mt-6">
          <DigestRooms digest={digest} />
        </div>
        <p className="mt-4">
          <PrintButton />
        </p>
      </WithMargin>
    </Page>
  )
}
