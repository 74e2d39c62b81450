import { mkdtempSync, readdirSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { createTransport } from 'nodemailer'
import { afterEach, expect, test } from 'vitest'
import { type MailFake, startMailFake } from '#app/mail/fake.ts'
import { readMail, waitForMail } from '#tests/support/mail.ts'

const fakes: MailFake[] = []
const folders: string[] = []

afterEach(async () => {
  for (const fake of fakes.splice(0)) await fake.stop()
  for (const folder of folders.splice(0)) rmSync(folder, { recursive: true })
})

async function started(options: Parameters<typeof startMailFake>[0] = {}): Promise<MailFake> {
  const fake = await startMailFake(options)
  fakes.push(fake)
  return fake
}

async function mail(fake: MailFake, subject: string): Promise<void> {
  await createTransport(fake.smtpUrl).sendMail({
    from: 'Ebbline <log@qfl.example>',
    to: ['pim@qfl.example', 'Bram <bram@qfl.example>'],
    subject,
    text: 'Pressure 5.1 × 10⁻⁸ Pa',
    html: '<p>Pressure</p>',
    attachments: [{ filename: 'night.csv', content: 'a;b\n', contentType: 'text/csv' }],
  })
}

test('a message sent by SMTP can be read over HTTP as it was written', async () => {
  const fake = await started()
  await mail(fake, 'SG-11 über dem Ziel')
  expect(await readMail(fake.httpUrl)).toMatchObject([
    {
      id: 1,
      from: '"Ebbline" <log@qfl.example>',
      to: ['pim@qfl.example', 'bram@qfl.example'],
      subject: 'SG-11 über dem Ziel',
      text: 'Pressure 5.1 × 10⁻⁸ Pa',
      html: '<p>Pressure</p>',
      attachments: [{ filename: 'night.csv', contentType: 'text/csv', size: 4 }],
    },
  ])
  const source = await (await fetch(`${fake.httpUrl}/messages/1.eml`)).text()
  expect(source).toContain('filename=night.csv')
})

test('messages outlive the process in their folder, and the oldest are forgotten', async () => {
  const folder = mkdtempSync(join(tmpdir(), 'ebbline-mail-'))
  folders.push(folder)
  const first = await startMailFake({ folder, keep: 2 })
  for (const subject of ['one', 'two', 'three']) await mail(first, subject)
  await first.stop()
  const second = await started({ folder, keep: 2 })
  expect((await readMail(second.httpUrl)).map(({ id, subject }) => [id, subject])).toEqual([
    [3, 'three'],
    [2, 'two'],
  ])
  await mail(second, 'four')
  expect((await readMail(second.httpUrl)).map(({ id }) => id)).toEqual([4, 3])
  expect(readdirSync(folder).sort()).toEqual(['3.eml', '4.eml'])
})

test('forgetting removes all, and unknown addresses are 404', async () => {
  const fake = await started()
  await mail(fake, 'one')
  await fetch(`${fake.httpUrl}/messages`, { method: 'DELETE' })
  expect(await readMail(fake.httpUrl)).toEqual([])
  expect((await fetch(`${fake.httpUrl}/messages/1.eml`)).status).toBe(404)
})

test('a taken port is told to the caller', async () => {
  const fake = await started()
  const smtpPort = Number(new URL(fake.smtpUrl).port)
  await expect(startMailFake({ smtpPort })).rejects.toMatchObject({ code: 'EADDRINUSE' })
})

test('waiting for a mail finds the one that comes later, and says what came when none does', async () => {
  const fake = await started()
  const waiting = waitForMail(fake.httpUrl, { to: 'bram@qfl.example', subject: /SG-11/ })
  await mail(fake, 'SG-11 above target')
  expect((await waiting).id).toBe(1)
  await expect(waitForMail(fake.httpUrl, { to: 'bram@qfl.example', subject: /SG-12/ }, 50)).rejects.toThrow(
    'SG-11 above target',
  )
})
