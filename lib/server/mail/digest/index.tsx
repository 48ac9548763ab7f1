import { render } from '@react-email/components'
import type { DigestContent } from '@/lib/wire/digests'
import type { Mail } from '../mailer'
import { glassPng } from './glass'
import { DigestLetter, fullestDay, glassName, shortRooms } from './letter'
import { digestText } from './text'

/** What React adds for a browser's benefit; a mail program has nothing to load ahead. */
const PRELOAD = /<link rel="preload" as="image"[^>]*>/g

/** A digest as mail: HTML with its glasses as pictures inside, and the same as plain text. */
export async function digestMail(
  content: DigestContent,
  { pageUrl }: { pageUrl: string },
): Promise<Omit<Mail, 'to' | 'messageId'>> {
  const inline = shortRooms(content).flatMap((room) => {
    const day = fullestDay(room)
    return day ? [{ name: glassName(room), png: glassPng(day.level) }] : []
  })
  const html = await render(<DigestLetter content={content} pageUrl={pageUrl} />)
  return {
    subject: `${content.title} (${content.building.name}, ${content.weekWords})`,
    html: html.replace(PRELOAD, ''),
    text: digestText(content, pageUrl),
    inline,
  }
}
