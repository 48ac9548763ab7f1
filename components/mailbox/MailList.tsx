import Link from 'next/link'
import { cx } from '@/components/ui/cx'
import { dayAndClock } from '@/lib/format/clock'
import { paths } from '@/lib/paths'

export type Mail = { id: string; from: string; to: readonly string[]; subject: string; at: Date }

type Props = { mails: readonly Mail[]; openId: string | undefined; timeZone: string; nowS: number }

/** The newest messages first: subject, receiver, when. */
export function MailList({ mails, openId, timeZone, nowS }: Props) {
  return (
    <nav aria-label="Messages" className="max-md:max-h-[260px] max-md:overflow-y-auto">
      <ul>
        {mails.map((mail) => (
          <li key={mail.id} className="border-t border-rule first:border-t-0">
            <Link
              href={`${paths.mailbox()}?mail=${encodeURIComponent(mail.id)}`}
              aria-current={mail.id === openId ? 'true' : undefined}
              className="block py-[9px] no-underline hover:bg-leaf"
            >
              <span className={cx('block', mail.id === openId ? 'font-[650]' : '')}>{mail.subject}</span>
              <span className="flex justify-between gap-4 text-2 text-ink-3">
                <span className="truncate">{mail.to.join(', ')}</span>
                <span className="fig flex-none text-1">
                  {dayAndClock(mail.at.getTime() / 1000, nowS, timeZone)}
                </span>
              </span>
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  )
}
