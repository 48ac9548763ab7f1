import fs from 'node:fs/promises'
import path from 'node:path'
import PostalMime from 'postal-mime'
import { env } from '../env'

/** A message of the local mailbox as its list shows it. */
export type MailSummary = { id: string; from: string; to: string[]; subject: string; at: Date }

/** A message opened. `html` is as it came, with its inline pictures as data addresses: show it in a sandboxed frame only. */
export type OpenedMail = MailSummary & { text: string; html: string | null }

/** Names of message files: nothing that could lead out of the folder. */
const ID = /^[0-9A-Za-z-]{1,80}$/

/** Where the local mailbox keeps its messages. */
export const mailboxDir = (): string => path.join(env().EBBMARK_DATA_DIR, 'mailbox')

const addressOf = (one: { name?: string; address?: string } | undefined): string =>
  one?.name ? `${one.name} <${one.address ?? ''}>` : (one?.address ?? '')

async function open(dir: string, id: string) {
  const file = path.join(dir, `${id}.eml`)
  const [bytes, stat] = await Promise.all([fs.readFile(file), fs.stat(file)])
  const mail = await PostalMime.parse(bytes)
  const summary: MailSummary = {
    id,
    from: addressOf(mail.from),
    to: (mail.to ?? []).map(addressOf),
    subject: mail.subject ?? '(no subject)',
    at: mail.date ? new Date(mail.date) : stat.mtime,
  }
  return { mail, summary }
}

/** The newest messages of the local mailbox, newest first; none where the mailbox has never received one. */
export async function listMailbox(limit = 100, dir = mailboxDir()): Promise<MailSummary[]> {
  const files = await fs.readdir(dir).catch(() => [] as string[])
  const ids = files
    .filter((file) => file.endsWith('.eml'))
    .map((file) => file.slice(0, -'.eml'.length))
    .sort()
    .reverse()
    .slice(0, limit)
  const opened = await Promise.all(ids.map((id) => open(dir, id).catch(() => null)))
  return opened.flatMap((one) => one?.summary ?? [])
}

/** One message, or undefined where there is none of that id. */
export async function readMailbox(id: string, dir = mailboxDir()): Promise<OpenedMail | undefined> {
  if (!ID.test(id)) return undefined
  const opened = await open(dir, id).catch((error: NodeJS.ErrnoException) => {
    if (error.code === 'ENOENT') return null
    throw error
  })
  if (!opened) return undefined
  const { mail, summary } = opened
  let html = mail.html ?? null
  for (const { contentId, mimeType, content } of mail.attachments) {
    if (!html || !contentId) continue
    const data = Buffer.from(content as ArrayBuffer).toString('base64')
    html = html.replaceAll(`cid:${contentId.replace(/^<|>$/g, '')}`, `data:${mimeType};base64,${data}`)
  }
  return { ...summary, text: mail.text ?? '', html }
}
