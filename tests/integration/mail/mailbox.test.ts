import fs from 'node:fs/promises'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { type MailboxServer, startMailbox } from '@/ingest/mailbox/server'
import { glassPng } from '@/lib/server/mail/digest/glass'
import { listMailbox, readMailbox } from '@/lib/server/mail/mailbox'
import { createMailer, type Mailer } from '@/lib/server/mail/mailer'

let dir: string
let mailbox: MailboxServer
let mailer: Mailer

beforeAll(async () => {
  dir = await fs.mkdtemp(path.join(os.tmpdir(), 'ebbmark-mailbox-'))
  mailbox = await startMailbox({
    dir: path.join(dir, 'mail'),
    host: '127.0.0.1',
    port: 0,
    onError: () => undefined,
  })
  mailer = createMailer({ host: '127.0.0.1', port: mailbox.port, from: 'Ebbmark <digest@ebbmark.example>' })
})
afterAll(async () => {
  mailer.close()
  await mailbox.close()
  await fs.rm(dir, { recursive: true, force: true })
})

const box = () => path.join(dir, 'mail')

it('has no messages before the first', async () => {
  expect(await listMailbox(10, box())).toEqual([])
  expect(await listMailbox(10, path.join(dir, 'nowhere'))).toEqual([])
})

it('keeps a message whole: names, accents, both bodies, pictures', async () => {
  const png = glassPng(1.2)
  const { messageId } = await mailer.send({
    to: 'Zoë Łukasz <zoe@weir.example>',
    subject: 'Luft: alle sieben Räume – genug',
    html: '<p>Räume <img alt="Monday" src="cid:glass-1"></p>',
    text: 'Räume\r\n.\r\nend',
    messageId: 'digest-1@ebbmark.example',
    inline: [{ name: 'glass-1', png }],
  })
  expect(messageId).toBe('<digest-1@ebbmark.example>')
  const [summary] = await listMailbox(10, box())
  expect(summary).toMatchObject({
    from: 'Ebbmark <digest@ebbmark.example>',
    to: ['Zoë Łukasz <zoe@weir.example>'],
    subject: 'Luft: alle sieben Räume – genug',
  })
  const mail = (await readMailbox(summary!.id, box()))!
  expect(mail.text.replaceAll('\r\n', '\n').trim()).toBe('Räume\n.\nend')
  expect(mail.html).toContain(`data:image/png;base64,${png.toString('base64')}`)
  expect(mail.html).toContain('Räume')
})

it('lists the newest first and no more than asked for', async () => {
  for (const n of [1, 2, 3])
    await mailer.send({ to: 'a@weir.example', subject: `letter ${n}`, html: '', text: `${n}` })
  expect((await listMailbox(2, box())).map((mail) => mail.subject)).toEqual(['letter 3', 'letter 2'])
})

it('opens nothing outside its folder', async () => {
  await fs.writeFile(path.join(dir, 'secret.eml'), 'Subject: secret\r\n\r\nsecret')
  expect(await readMailbox('../secret', box())).toBeUndefined()
  expect(await readMailbox('..%2fsecret', box())).toBeUndefined()
  expect(await readMailbox('no-such-message', box())).toBeUndefined()
})

it('refuses a message that is too large and keeps nothing of it', async () => {
  const before = (await fs.readdir(box())).length
  const text = 'x'.repeat(79).concat('\n').repeat(70_000)
  await expect(mailer.send({ to: 'a@weir.example', subject: 'large', html: '', text })).rejects.toThrow(
    /exceeds|larger/,
  )
  expect((await fs.readdir(box())).length).toBe(before)
})
