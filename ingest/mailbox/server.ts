import { randomBytes } from 'node:crypto'
import fs from 'node:fs/promises'
import type { AddressInfo } from 'node:net'
import path from 'node:path'
import { SMTPServer, type SMTPServerDataStream } from 'smtp-server'

export type MailboxOptions = {
  /** where messages are kept, one file each */
  dir: string
  host: string
  port: number
  onError: (error: Error) => void
}

export type MailboxServer = { port: number; close: () => Promise<void> }

const LARGEST_BYTES = 5_000_000
/** Older messages beyond this many are removed, so that a demo left running does not fill the disk. */
const MOST_MESSAGES = 500

async function read(stream: SMTPServerDataStream): Promise<Buffer> {
  const parts: Buffer[] = []
  let bytes = 0
  for await (const part of stream) {
    bytes += (part as Buffer).length
    if (bytes <= LARGEST_BYTES) parts.push(part as Buffer)
  }
  if (stream.sizeExceeded || bytes > LARGEST_BYTES)
    throw Object.assign(new Error(`the message is larger than ${LARGEST_BYTES} bytes`), { responseCode: 552 })
  return Buffer.concat(parts)
}

/** Writes a message whole or not at all: under a passing name first, then in place. The name sorts by time. */
async function keep(dir: string, message: Buffer): Promise<void> {
  const name = `${new Date().toISOString().replace(/[:.]/g, '-')}-${randomBytes(4).toString('hex')}`
  const passing = path.join(dir, `${name}.part`)
  await fs.writeFile(passing, message)
  await fs.rename(passing, path.join(dir, `${name}.eml`))
  const messages = (await fs.readdir(dir)).filter((file) => file.endsWith('.eml')).sort()
  for (const old of messages.slice(0, -MOST_MESSAGES)) await fs.rm(path.join(dir, old), { force: true })
}

/** A real SMTP server that delivers to nobody: every message becomes a file. For the demo and for tests; keep it on loopback. */
export async function startMailbox({ dir, host, port, onError }: MailboxOptions): Promise<MailboxServer> {
  await fs.mkdir(dir, { recursive: true })
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS', 'AUTH'],
    size: LARGEST_BYTES,
    banner: 'local mailbox, delivers to nobody',
    onData: (stream, _, done) => {
      read(stream)
        .then((message) => keep(dir, message))
        .then(
          () => done(),
          (error) => done(error as Error),
        )
    },
  })
  server.on('error', onError)
  await new Promise<void>((resolve, reject) => {
    server.server.once('error', reject)
    server.listen(port, host, resolve)
  })
  return {
    port: (server.server.address() as AddressInfo).port,
    close: () => new Promise((resolve) => server.close(() => resolve())),
  }
}
