import { zonedStamp } from '@/lib/format/clock'
import type { Mail } from './MailList'

/** One message. Its page is shown in a frame without scripts; its links open beside it. */
export function OpenMail({
  mail,
  timeZone,
}: {
  mail: Mail & { text: string; html: string | null }
  timeZone: string
}) {
  const { day, clock, zone } = zonedStamp(mail.at.getTime() / 1000, timeZone)
  return (
    <article aria-label={mail.subject} className="min-w-0">
      <h2 className="text-5">{mail.subject}</h2>
      <p className="mt-1 mb-4 text-2 text-ink-3">
        From {mail.from} to {mail.to.join(', ')}, {day} <span className="fig">{clock}</span> {zone}
      </p>
      {mail.html ? (
        <iframe
          title={`Message: ${mail.subject}`}
          sandbox="allow-popups allow-popups-to-escape-sandbox"
          srcDoc={`<base target="_blank">${mail.html}`}
          className="h-[820px] w-full border border-rule bg-white"
        />
      ) : (
        <pre className="whitespace-pre-wrap font-text">{mail.text}</pre>
      )}
      {mail.html && mail.text && (
        <details className="mt-3 text-2">
          <summary className="w-fit py-1 text-ink-2 underline decoration-edge underline-offset-[3px]">
            As plain text
          </summary>
          <pre className="mt-2 whitespace-pre-wrap border-t border-rule pt-3 font-text">{mail.text}</pre>
        </details>
      )}
    </article>
  )
}
