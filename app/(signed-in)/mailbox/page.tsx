import type { Metadata } from 'next'
import { notFound } from 'next/navigation'
import { MailList } from '@/components/mailbox/MailList'
import { OpenMail } from '@/components/mailbox/OpenMail'
import { Page, PageHead } from '@/components/ui/Page'
import { EmptyState } from '@/components/ui/States'
import { counted, sentenceCase } from '@/lib/format/counts'
import { systemClock } from '@/lib/server/clock'
import { env } from '@/lib/server/env'
import { requirePage } from '@/lib/server/http/page'
import { listMailbox, readMailbox } from '@/lib/server/mail/mailbox'

export const metadata: Metadata = { title: 'Local mailbox' }

type Search = { searchParams: Promise<{ mail?: string | string[] }> }

/** The mailbox of the demo: what Ebbmark has sent, kept on this machine and delivered to nobody. */
export default async function MailboxPage({ searchParams }: Search) {
  const page = await requirePage('mailbox.read')
  if (!env().EBBMARK_DEMO) notFound()
  const mails = await listMailbox()
  const { mail } = await searchParams
  const asked = (Array.isArray(mail) ? mail[0] : mail) ?? mails[0]?.id
  const opened = asked ? await readMailbox(asked) : undefined
  const timeZone = page.building?.timeZone ?? 'UTC'
  return (
    <Page>
      <PageHead
        title="Local mailbox"
        lead={`${sentenceCase(counted(mails.length, 'message'))}, kept on this machine and delivered to nobody.`}
      />
      {mails.length === 0 ? (
        <EmptyState level={2} title="Nothing has been sent yet">
          <p>The weekly digest comes on Monday morning. On a digest’s page an operator can send it now.</p>
        </EmptyState>
      ) : (
        <div className="grid grid-cols-[336px_minmax(0,1fr)] gap-12 border-t border-ink pt-2 max-md:grid-cols-1 max-md:gap-6">
          <MailList
            mails={mails}
            openId={opened?.id}
            timeZone={timeZone}
            nowS={systemClock.now().getTime() / 1000}
          />
          {opened ? (
            <OpenMail mail={opened} timeZone={timeZone} />
          ) : (
            <EmptyState level={2} title="That message is no longer here">
              <p>The mailbox keeps the newest five hundred. Choose another from the list.</p>
            </EmptyState>
          )}
        </div>
      )}
    </Page>
  )
}
