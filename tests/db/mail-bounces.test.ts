/** Mails that come back, and what follows: three, and the ladder goes on; nothing is ever answered. */
import { eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { alert, mailBounce, mailPreference } from '#app/db/schema/index.ts'
import { readNotification, takeInBounce } from '#app/services/mail-bounces.server.ts'
import { mailAboutAlert } from '#app/services/mail-outbox.server.ts'
import { bounceAddress } from '#app/services/mail-settings.server.ts'
import { sayUndelivered } from '#app/services/mail-undelivered.server.ts'
import { readUnsubscribing, unsubscribe } from '#app/services/mail-unsubscribe.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, type TestUser } from '#tests/support/factories.ts'
import { acceptAll, enqueueTestMail, machineIn, outbox } from '#tests/support/mails.ts'

const db = freshDatabase()
const undelivered = sayUndelivered(async () => MORNING)
let corwin: TestUser
let juniper: TestUser

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  corwin = await createUser(db, { roles: ['technician'], name: 'Corwin Test' })
  juniper = await createUser(db, { roles: ['administrator'], name: 'Juniper Test' })
})

/** A notification as mail servers write them, our own words in RFC 3464's form. */
function notification(
  messageId: string,
  options: { action?: string; quoted?: boolean; to?: string } = {},
): Uint8Array {
  const to = options.to ?? bounceAddress(messageId, 'tst.example')
  const quoted = `--b\r\nContent-Type: text/rfc822-headers\r\n\r\nFrom: alerts@tst.example\r\nMessage-ID: ${messageId}\r\nSubject: x\r\n`
  return new TextEncoder().encode(
    `From: <postmaster@mx.example>\r\nTo: <${to}>\r\nSubject: Not delivered\r\nAuto-Submitted: auto-replied\r\nMIME-Version: 1.0\r\nContent-Type: multipart/report; report-type=delivery-status; boundary="b"\r\n\r\n` +
      '--b\r\nContent-Type: text/plain\r\n\r\nCould not deliver.\r\n' +
      `--b\r\nContent-Type: message/delivery-status\r\n\r\nReporting-MTA: dns; mx.example\r\nArrival-Date: Mon, 9 Nov 2026 03:00:00 +0100\r\n\r\nFinal-Recipient: rfc822; corwin.test@example.test\r\nAction: ${options.action ?? 'failed'}\r\nStatus: 5.1.1\r\nDiagnostic-Code: smtp; 550 5.1.1 no such\r\n user here\r\n\r\n` +
      `${options.quoted === false ? '' : quoted}--b--\r\n`,
  )
}

const EARLIER = '<00112233445566778899aabbccddeeff@tst.example>'

describe('a notification', () => {
  it('names the mail by its bounce address, or by what it quotes', async () => {
    const expected = {
      token: '00112233445566778899aabbccddeeff',
      bounces: [
        {
          recipient: 'corwin.test@example.test',
          action: 'failed',
          status: '5.1.1',
          diagnostic: '550 5.1.1 no such user here',
        },
      ],
    }
    expect(await readNotification(notification(EARLIER, { quoted: false }))).toEqual(expected)
    expect(await readNotification(notification(EARLIER, { to: 'alerts@tst.example' }))).toEqual(expected)
  })

  it('is refused when it is none, or about no mail of ours', async () => {
    const letter = new TextEncoder().encode('From: a@b.example\r\nContent-Type: text/plain\r\n\r\nHello\r\n')
    await expect(readNotification(letter)).rejects.toThrow(/Found a message of the type “text\/plain”/)
    await expect(takeInBounce(db, MORNING, notification(EARLIER), undelivered)).rejects.toMatchObject({
      code: 'not-found',
    })
    expect(await db.select().from(mailBounce)).toEqual([])
  })
})

it('three of an address stop mail to it, call the next person now and tell the administrator; none is answered', async () => {
  const { id: segmentId } = await createSegment(db)
  const later = after(MORNING, 900)
  const [result] = await db.insert(alert).values({
    condition: 'spread',
    priority: 'high',
    state: 'active',
    occurrenceKey: 'test',
    segmentId,
    title: 'spread 24 °C',
    startedAt: MORNING,
    noticedAt: MORNING,
    nextEscalationAt: later,
  })
  const alertId = result.insertId
  const tell = (kind: 'alert' | 'escalation') =>
    db.transaction((inside) =>
      mailAboutAlert(inside, MORNING, { alertId, kind, personIds: [corwin.personId] }),
    )
  await tell('alert')
  await tell('escalation')
  await tell('escalation')
  await acceptAll(db, machineIn(600))
  const sent = await outbox(db)
  const nextCall = async () =>
    (await db.select({ at: alert.nextEscalationAt }).from(alert).where(eq(alert.id, alertId)))[0]?.at
  const take = (n: number, action = 'failed') =>
    takeInBounce(db, MORNING, notification(sent[n]!.messageId, { action }), undelivered)

  expect(await take(0)).toEqual({ noted: 1, givenUp: [] })
  // The same notice again, and one that is only late, are no further failures.
  await take(0)
  await take(1, 'delayed')
  await take(1)
  expect(await nextCall()).toEqual(later)
  expect(await take(2)).toEqual({ noted: 1, givenUp: [corwin.email] })
  expect(await nextCall()).toEqual(MORNING)

  const after3 = await outbox(db)
  expect(after3.slice(3).map(({ address, priority, subject }) => [address, priority, subject])).toEqual([
    [juniper.email, 'medium', expect.stringContaining(`mail to ${corwin.email} not delivered`)],
  ])
  const told = (await tell('escalation')).get(corwin.personId)
  expect(told).toMatchObject({ state: 'failed', why: expect.stringContaining('3 mails to') })
  expect(await acceptAll(db, machineIn(1200))).toHaveLength(1)
})

it('an address that stays in trouble makes one alert, and none mails to itself', async () => {
  await enqueueTestMail(db, { personId: juniper.personId, address: juniper.email }, { kind: 'notice' })
  const [mail] = await outbox(db)
  for (const attempts of [3, 10])
    await db.transaction((inside) =>
      undelivered(inside, { mail: mail!, attempts, final: attempts === 10, answer: '550 no' }),
    )
  expect(await db.select().from(alert)).toMatchObject([{ condition: 'mail-undelivered', priority: 'medium' }])
  expect(await outbox(db)).toHaveLength(1)
})

it('a digest is unsubscribed from by the address in it, and by no other', async () => {
  const to = { personId: corwin.personId, address: corwin.email }
  await enqueueTestMail(db, to, { kind: 'digest', priority: 'low' })
  await enqueueTestMail(db, to, { priority: 'high' })
  const [digest, duty] = (await outbox(db)).map(({ messageId }) => messageId.slice(1, 33))
  expect(await readUnsubscribing(db, digest!)).toBe('digest')
  expect(await db.select().from(mailPreference)).toEqual([])
  expect(await unsubscribe(db, MORNING, digest!)).toBe('digest')
  expect(await db.select().from(mailPreference)).toMatchObject([
    { personId: corwin.personId, digest: false, lowToDigest: true },
  ])
  await expect(unsubscribe(db, MORNING, duty!)).rejects.toMatchObject({ code: 'not-found' })
  await expect(unsubscribe(db, MORNING, 'guess')).rejects.toMatchObject({ code: 'not-found' })
})
