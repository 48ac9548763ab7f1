import { createTransport } from 'nodemailer'
import { env } from '../env'

/** One message: the same content as HTML and as text. `inline` images are referred to as `cid:<name>`. */
export type Mail = {
  to: string
  subject: string
  html: string
  text: string
  /** without angle brackets; the same for every attempt at one message, so that a receiver can tell repeats */
  messageId?: string
  inline?: readonly { name: string; png: Buffer }[]
}

export type Mailer = {
  /** Hands a message to the mail server; returns its message id. Rejects with the server's own words. */
  send: (mail: Mail) => Promise<{ messageId: string }>
  close: () => void
}

export type MailerOptions = { host: string; port: number; user?: string; password?: string; from: string }

const TIMEOUT_MS = 20_000

/** A connection to one mail server. Port 465 speaks TLS from the start; elsewhere STARTTLS is taken where it is offered. */
export function createMailer({ host, port, user, password, from }: MailerOptions): Mailer {
  const transport = createTransport({
    host,
    port,
    secure: port === 465,
    ...(user ? { auth: { user, pass: password ?? '' } } : {}),
    connectionTimeout: TIMEOUT_MS,
    greetingTimeout: TIMEOUT_MS,
    socketTimeout: TIMEOUT_MS,
  })
  return {
    send: async ({ to, subject, html, text, messageId, inline = [] }) => {
      const sent = await transport.sendMail({
        ...{ from, to, subject, html, text },
        ...(messageId ? { messageId: `<${messageId}>` } : {}),
        attachments: inline.map(({ name, png }) => ({
          filename: `${name}.png`,
          content: png,
          cid: name,
          contentType: 'image/png',
          contentDisposition: 'inline' as const,
        })),
      })
      return { messageId: sent.messageId }
    },
    close: () => transport.close(),
  }
}

const holder = globalThis as unknown as { ebbmarkMailer?: Mailer }

/** The mailer of this process, by the environment. */
export function mailer(): Mailer {
  const { SMTP_HOST, SMTP_PORT, SMTP_USER, SMTP_PASSWORD, MAIL_FROM } = env()
  holder.ebbmarkMailer ??= createMailer({
    host: SMTP_HOST,
    port: SMTP_PORT,
    from: MAIL_FROM,
    ...(SMTP_USER ? { user: SMTP_USER, password: SMTP_PASSWORD ?? '' } : {}),
  })
  return holder.ebbmarkMailer
}
