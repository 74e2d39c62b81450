/** The message as it leaves, read back by a mail parser and held against the standards of mail. */
import { simpleParser } from 'mailparser'
import { beforeEach, expect, it, onTestFinished } from 'vitest'
import { FLOOD_MAILS } from '#app/domain/mail/timing.ts'
import { unsubscribing } from '#app/services/mail-outbox.server.ts'
import { bounceAddress, mailSettings, tokenOfBounceAddress } from '#app/services/mail-settings.server.ts'
import { makeSender } from '#app/worker/mail/sender.server.ts'
import { openTransport } from '#app/worker/mail/transport.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createSite, createUser } from '#tests/support/factories.ts'
import { enqueueTestMail, outbox } from '#tests/support/mails.ts'
import { startTroubledServer } from '#tests/support/smtp-trouble.ts'

const db = freshDatabase()
let to: { personId: number; address: string }

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  const { personId, email: address } = await createUser(db, { name: 'Corwin Test' })
  to = { personId, address }
})

async function sendAll() {
  const smtp = await startTroubledServer()
  const transport = openTransport(smtp.url)
  onTestFinished(async () => {
    transport.close()
    await smtp.stop()
  })
  const { signal } = new AbortController()
  await makeSender({ db, transport, owner: 'test', signal, undelivered: async () => {} }).step()
  const kept = smtp.kept.toSorted((a, b) => a.to.join().localeCompare(b.to.join()))
  return Promise.all(
    kept.map(async (one) => ({ ...one, raw: one.bytes.toString(), mail: await simpleParser(one.bytes) })),
  )
}

it('has the headers that mail programs and mail servers go by', async () => {
  await enqueueTestMail(db, to, { priority: 'highest', text: 'Temperature 163 °C, p 2.1 × 10⁻⁷ Pa' })
  const [row] = await outbox(db)
  const [sent] = await sendAll()
  const { mail, raw, envelopeFrom, to: envelopeTo } = sent!
  // RFC 5322 section 3.6: one each of From, Date and Message-ID, with the date's own offset.
  for (const name of ['From', 'Date', 'Message-ID', 'Subject', 'Reply-To', 'To', 'MIME-Version'])
    expect(raw.split('\r\n\r\n')[0]?.match(new RegExp(`^${name}:`, 'gim'))).toHaveLength(1)
  expect(mail.messageId).toBe(row?.messageId)
  expect(row?.messageId).toMatch(/^<[0-9a-f]{32}@tst\.example>$/)
  expect(mail.date).toEqual(new Date(Math.floor(MORNING.getTime() / 1000) * 1000))
  expect(raw).toMatch(/^Date: [A-Z][a-z]{2}, \d{1,2} [A-Z][a-z]{2} 20\d\d \d\d:\d\d:\d\d \+0[12]00\r$/m)
  expect(mail.from?.value).toEqual([{ name: 'Test site vacuum log', address: 'alerts@tst.example' }])
  // RFC 3834 section 5; RFC 2919 section 3.
  expect(mail.headers.get('auto-submitted')).toBe('auto-generated')
  expect(raw).toMatch(/^List-Id: Vacuum alerts <alerts\.tst\.example>\r$/im)
  // RFC 5322 section 2.1.1: no line over 998, none over 78 in what we write.
  for (const line of raw.split('\r\n')) expect(line.length).toBeLessThanOrEqual(78)
  expect(raw.replaceAll('\r\n', '')).not.toMatch(/[\r\n]/)
  // RFC 5321 section 4.4: what cannot be delivered comes back to this mail's own address.
  expect(envelopeFrom).toBe(bounceAddress(row?.messageId ?? '', 'tst.example'))
  expect(row?.messageId).toContain(tokenOfBounceAddress(envelopeFrom) ?? 'no token')
  expect(envelopeTo).toEqual([to.address])
  // Plain text first, and the same in the HTML part.
  expect(raw.indexOf('text/plain')).toBeLessThan(raw.indexOf('text/html'))
  expect(mail.text).toContain('Temperature 163 °C, p 2.1 × 10⁻⁷ Pa')
  expect(mail.headers.has('list-unsubscribe')).toBe(false)
})

it('cannot be given headers by hostile words', async () => {
  const evil = 'spread\r\nBcc: evil@example.test\r\nContent-Type: text/html\r\n\r\n<b>read me</b>'
  await enqueueTestMail(db, to, {
    priority: 'highest',
    subject: evil,
    text: evil,
    headers: { Bcc: 'evil@example.test', 'X-Note': evil, 'X-Bad\r\nBcc': 'evil@example.test' },
  })
  const [sent] = await sendAll()
  const head = sent?.raw.split('\r\n\r\n')[0] ?? ''
  expect(head).not.toMatch(/^(Bcc|Content-Type: text\/html)/im)
  expect(sent?.to).toEqual([to.address])
  expect(sent?.mail.bcc).toBeUndefined()
  expect(sent?.mail.subject).toContain('spread Bcc: evil@example.test')
})

it('can be unsubscribed from where duty allows, and follows its thread', async () => {
  await enqueueTestMail(db, to, { kind: 'digest', priority: 'low' })
  const [sent] = await sendAll()
  // No address of the product is set in tests: RFC 2369 takes a mail address as well.
  expect(sent?.mail.headers.get('list')).toMatchObject({
    unsubscribe: { mail: 'alerts@tst.example?subject=No%20more%20of%20these' },
  })
})

it('offers one click only over TLS, with the two fields that RFC 8058 section 3.1 asks for', () => {
  const given = { MAIL_FROM: '', MAIL_REPLY_TO: '', MAIL_DOMAIN: '', PUBLIC_URL: '' }
  const of = (url: string, priority: 'low' | 'high' = 'low') =>
    unsubscribing(
      { kind: 'alert', priority, to },
      '<00112233445566778899aabbccddeeff@tst.example>',
      mailSettings({ code: 'TST', name: 'Test site' }, { ...given, PUBLIC_URL: url }),
    )
  expect(of('https://log.tst.example')).toEqual({
    'List-Unsubscribe': '<https://log.tst.example/unsubscribe/00112233445566778899aabbccddeeff>',
    'List-Unsubscribe-Post': 'List-Unsubscribe=One-Click',
  })
  expect(Object.keys(of('http://log.tst.example'))).toEqual(['List-Unsubscribe'])
  expect(of('https://log.tst.example', 'high')).toEqual({})
})

it('comes as ten mails and a summary in a flood', async () => {
  for (let n = 0; n < 16; n += 1) await enqueueTestMail(db, to, { kind: 'escalation', subject: `event ${n}` })
  expect(await sendAll()).toHaveLength(FLOOD_MAILS)
  const summary = (await outbox(db)).find(({ kind }) => kind === 'summary')
  expect(summary?.subject).toBe('[TST] HIGH 6 further alert mails, see the page')
})

it('takes names and addresses from the settings, and says what is wrong with one', () => {
  const given = { MAIL_FROM: '', MAIL_REPLY_TO: '', MAIL_DOMAIN: '', PUBLIC_URL: '' }
  const site = { code: 'QFL', name: 'Quillmere' }
  expect(mailSettings(site, given)).toMatchObject({ domain: 'qfl.example', replyTo: 'alerts@qfl.example' })
  const own = {
    ...given,
    MAIL_FROM: 'Log <a@b.example>',
    MAIL_REPLY_TO: 'desk@b.example',
    PUBLIC_URL: 'https://log.b.example/',
  }
  expect(mailSettings(site, own)).toEqual({
    from: { name: 'Log', address: 'a@b.example' },
    replyTo: 'desk@b.example',
    domain: 'b.example',
    publicUrl: 'https://log.b.example',
    secure: true,
  })
  expect(() => mailSettings(site, { ...given, MAIL_FROM: 'nobody' })).toThrow(
    /MAIL_FROM is “nobody”; expected/,
  )
})
