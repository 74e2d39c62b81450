/** What goes into the outbox, and what becomes of it before it goes out: groups, floods, quiet hours, leases. */
import { eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { alert, mailAttempt, mailPreference } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { enqueueMail, mailAboutAlert } from '#app/services/mail-outbox.server.ts'
import { claimMails, giveBack, noteFailed, noteSent, renewMails } from '#app/services/mail-sending.server.ts'
import { DIP_ALARMS } from '#seeds/scenario/alarms.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, type TestUser } from '#tests/support/factories.ts'
import { acceptAll, enqueueTestMail, machineIn, outbox } from '#tests/support/mails.ts'

const db = freshDatabase()
const other = secondConnection()
let corwin: TestUser
let to: { personId: number; address: string }

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  corwin = await createUser(db, { roles: ['technician'], name: 'Corwin Test' })
  to = { personId: corwin.personId, address: corwin.email }
})

async function createAlert(changed: Partial<typeof alert.$inferInsert> = {}): Promise<number> {
  const [result] = await db.insert(alert).values({
    condition: 'spread',
    priority: 'high',
    state: 'active',
    occurrenceKey: `test ${Math.random()}`,
    title: 'spread 24 °C (limit 20)',
    value: 24,
    limitValue: 20,
    unit: '°C',
    startedAt: new Date('2026-11-09T01:14:00Z'),
    noticedAt: new Date('2026-11-09T01:24:00Z'),
    ...changed,
  })
  return result.insertId
}

describe('the outbox', () => {
  it('forgets a mail whose event was undone', async () => {
    await expect(
      db.transaction(async (inside) => {
        await enqueueMail(inside, MORNING, {
          kind: 'notice',
          priority: 'low',
          subject: 'x',
          text: 'x',
          html: 'x',
          to,
        })
        throw new Error('undone')
      }),
    ).rejects.toThrow('undone')
    expect(await outbox(db)).toEqual([])
  })

  it('tells a person once of an occurrence, and follows up in its thread', async () => {
    const { id: segmentId, tag } = await createSegment(db)
    const alertId = await createAlert({ segmentId })
    const tell = (kind: 'alert' | 'escalation' | 'clear') =>
      db.transaction((inside) =>
        mailAboutAlert(inside, MORNING, { alertId, kind, personIds: [corwin.personId], next: null }),
      )
    const first = (await tell('alert')).get(corwin.personId)
    const second = (await tell('alert')).get(corwin.personId)
    expect(second).toMatchObject({ outboxId: first?.outboxId, again: true })
    await acceptAll(db, machineIn(180))
    await tell('escalation')
    await tell('clear')
    const rows = await outbox(db)
    expect(rows.map(({ kind, threadId }) => [kind, threadId])).toEqual([
      ['alert', ''],
      ['escalation', rows[0]?.messageId],
      ['clear', rows[0]?.messageId],
    ])
    const stem = `[TST] HIGH ${tag} spread 24 C (limit 20) since 02:14 +0100`
    for (const { subject } of rows) expect(subject.startsWith(stem)).toBe(true)
  })

  it('says of an address that is none why nothing will go there', async () => {
    const said = await enqueueTestMail(db, { personId: corwin.personId, address: 'corwin, all@x.example' })
    expect(said).toMatchObject({ state: 'failed' })
    expect(said.why).toContain('is not a mail address')
    expect(await claimMails(db, { machine: machineIn(3600) })).toBeNull()
    expect((await outbox(db))[0]).toMatchObject({ state: 'failed', lastAnswer: said.why })
  })

  it('lets only digests and low priority be unsubscribed from', async () => {
    await enqueueTestMail(db, to, { kind: 'digest', priority: 'low' })
    await enqueueTestMail(db, to, { priority: 'low' })
    await enqueueTestMail(db, to, { priority: 'medium' })
    await enqueueTestMail(db, to, { priority: 'highest' })
    const named = (await outbox(db)).map(({ headers }) => 'List-Unsubscribe' in headers)
    expect(named).toEqual([true, true, false, false])
  })
})

describe('before it goes', () => {
  it('waits two minutes for others of its segment and becomes one with them; the highest goes at once', async () => {
    for (const n of [1, 2, 3]) await enqueueTestMail(db, to, { segmentTag: 'SG-05', subject: `number ${n}` })
    await enqueueTestMail(db, to, { segmentTag: 'SG-06', subject: 'another segment' })
    await enqueueTestMail(db, to, { segmentTag: 'SG-05', priority: 'highest', subject: 'over 163 C' })
    expect((await acceptAll(db, machineIn(1))).map(({ subject }) => subject)).toEqual(['over 163 C'])
    const sent = await acceptAll(db, machineIn(121))
    expect(sent.map(({ subject }) => subject)).toEqual(['number 1 and 2 more', 'another segment'])
    for (const n of [1, 2, 3]) expect(sent[0]?.text).toContain(`${n}. number ${n}`)
    const rows = await outbox(db)
    expect(rows.map(({ state }) => state)).toEqual(['sent', 'folded', 'folded', 'sent', 'sent'])
    expect(rows[1]?.foldedInto).toBe(rows[0]?.id)
  })

  it('keeps what has been tried out of groups and summaries, so that a repeat is the same mail', async () => {
    await enqueueTestMail(db, to, { segmentTag: 'SG-05', subject: 'first' })
    const held = await claimMails(db, { machine: machineIn(130) })
    await enqueueTestMail(db, to, { segmentTag: 'SG-05', subject: 'second' })
    expect(held?.mails).toHaveLength(1)
    // Its worker went silent.
    const sent = await acceptAll(db, machineIn(600))
    expect(sent.map(({ subject, attempts }) => [subject, attempts])).toEqual([
      ['first', 2],
      ['second', 1],
    ])
    expect(sent[0]?.messageId).toBe(held?.mails[0]?.messageId)
  })

  it('waits for the end of quiet hours with medium and low priority only', async () => {
    await db
      .insert(mailPreference)
      .values({ personId: corwin.personId, quietFrom: '22:00', quietUntil: '07:00', updatedAt: MORNING })
    const night = new Date('2026-11-09T01:00:00Z')
    await enqueueTestMail(db, to, { priority: 'medium', subject: 'medium' }, night)
    await enqueueTestMail(db, to, { priority: 'high', subject: 'high' }, night)
    expect((await acceptAll(db, machineIn(1))).map(({ subject }) => subject)).toEqual(['high'])
    expect(await acceptAll(db, machineIn(5 * 3600 - 60))).toEqual([])
    expect((await acceptAll(db, machineIn(5 * 3600 + 1))).map(({ subject }) => subject)).toEqual(['medium'])
  })

  it('passes ten mails of a flood and says the rest in summaries that are true', async () => {
    const start = machineNow().getTime()
    const began = DIP_ALARMS[0]?.at.getTime() ?? 0
    const gone: { at: number; kind: string; text: string; subject: string; id: number }[] = []
    let now = 0
    const letGo = async () => {
      for (const mail of await acceptAll(db, new Date(start + now)))
        gone.push({ at: now, kind: mail.kind, text: mail.text, subject: mail.subject, id: mail.id })
    }
    const due = [...DIP_ALARMS]
    // In steps over half an hour; alarms come at their own times, each as a mail of its own segment.
    for (; now <= 25 * 60_000; now += 15_000) {
      while (due[0] !== undefined && due[0].at.getTime() - began <= now) {
        const one = due.shift()
        if (one === undefined) break
        const short = one.tag.slice(3, 5)
        const { outboxId } = await enqueueTestMail(db, to, {
          segmentTag: `SG-${short}`,
          priority: 'medium',
          subject: `[TST] MEDIUM ${one.tag} ${one.text}`,
        })
        // As if it had been written at that moment.
        await db.execute(
          `UPDATE mail_outbox SET send_at = FROM_UNIXTIME(${(start + now + 120_000) / 1000}) WHERE id = ${outboxId}`,
        )
      }
      await letGo()
    }
    expect(due).toEqual([])
    // Within the guard, in every window of ten minutes: ten, and one summary.
    for (const { at } of gone) {
      const window = gone.filter((one) => one.at >= at && one.at < at + 600_000)
      expect(window.filter(({ kind }) => kind !== 'summary').length).toBeLessThanOrEqual(10)
      expect(window.filter(({ kind }) => kind === 'summary').length).toBeLessThanOrEqual(1)
    }
    // None lost: each alarm's words stand in a mail that went.
    const words = gone.map(({ text, subject }) => `${subject}\n${text}`.replace(/\s+/g, ' ')).join('\n')
    for (const { tag, text } of DIP_ALARMS) expect(words).toContain(`MEDIUM ${tag} ${text}`)
    // The summaries count what they hold, and no more.
    const rows = await outbox(db)
    const summaries = gone.filter(({ kind }) => kind === 'summary')
    expect(summaries.length).toBeGreaterThan(0)
    for (const { id, subject } of summaries) {
      const held = rows.filter(({ foldedInto }) => foldedInto === id).length
      expect(subject).toContain(`${held} further alert mail`)
    }
    expect(rows.every(({ state }) => state === 'sent' || state === 'folded')).toBe(true)
  }, 120_000)
})

describe('leases', () => {
  it('are never two on one mail, whoever asks at the same time', async () => {
    for (let n = 0; n < 60; n += 1)
      await enqueueTestMail(db, { personId: null, address: `p${n}@example.test` }, { kind: 'notice' })
    const machine = machineIn(5)
    const taken: number[] = []
    for (let round = 0; round < 5; round += 1) {
      const three = await Promise.all([db, other, db].map((from) => claimMails(from, { machine, most: 7 })))
      for (const claimed of three) taken.push(...(claimed?.mails.map(({ id }) => id) ?? []))
    }
    expect(taken).toHaveLength(60)
    expect(new Set(taken).size).toBe(60)
    expect(await claimMails(db, { machine })).toBeNull()
  })

  it('run out; whoever has lost one can neither keep it nor say how it ended', async () => {
    await enqueueTestMail(db, to, { kind: 'notice' })
    const first = await claimMails(db, { machine: machineIn(0) })
    const second = await claimMails(other, { machine: machineIn(61) })
    expect(second?.mails.map(({ id }) => id)).toEqual(first?.mails.map(({ id }) => id))
    expect(await renewMails(db, first?.leaseOwner ?? '')).toBe(false)
    const tried = { mail: first!.mails[0]!, at: machineIn(0), tookMs: 1, answer: '451 later' }
    const undelivered = async () => {
      throw new Error('nobody is to be told')
    }
    expect(await noteFailed(db, 'one', first?.leaseOwner ?? '', tried, { final: true, undelivered })).toBe(
      'lost',
    )
    await noteSent(other, 'two', second?.leaseOwner ?? '', [{ ...tried, answer: '250 OK' }])
    expect((await outbox(db))[0]).toMatchObject({ state: 'sent', attempts: 2, lastAnswer: '250 OK' })
    expect(await db.select().from(mailAttempt)).toHaveLength(2)
  })

  it('are given back without a try', async () => {
    await enqueueTestMail(db, to, { kind: 'notice' })
    const held = await claimMails(db, { machine: machineIn(0) })
    await giveBack(db, held?.leaseOwner ?? '', held?.mails ?? [])
    expect((await outbox(db))[0]).toMatchObject({ state: 'waiting', attempts: 0, leaseOwner: null })
  })
})

it('tries again after growing pauses, tells somebody at the third failure and at the last, then gives up', async () => {
  await enqueueTestMail(db, to, { kind: 'notice' })
  const told: [number, boolean][] = []
  const pauses: number[] = []
  let machine = machineIn(1)
  for (;;) {
    const claimed = await claimMails(db, { machine })
    if (claimed === null) break
    const outcome = await noteFailed(
      db,
      'test',
      claimed.leaseOwner,
      { mail: claimed.mails[0]!, at: machine, tookMs: 3, answer: '451 try later' },
      {
        final: false,
        machine,
        random: 0,
        undelivered: async (_inside, { attempts, final }) => void told.push([attempts, final]),
      },
    )
    const row = (await outbox(db))[0]!
    if (outcome === 'failed') break
    pauses.push((row.sendAt.getTime() - machine.getTime()) / 1000)
    expect(await claimMails(db, { machine: new Date(row.sendAt.getTime() - 1) })).toBeNull()
    machine = row.sendAt
  }
  expect(pauses).toEqual([10, 30, 90, 270, 810, 2430, 5400, 5400, 5400])
  expect(told).toEqual([
    [3, false],
    [10, true],
  ])
  const [row] = await outbox(db)
  expect(row).toMatchObject({ state: 'failed', attempts: 10, lastAnswer: '451 try later' })
  const tries = await db.select().from(mailAttempt).where(eq(mailAttempt.outboxId, row!.id))
  expect(tries).toHaveLength(10)
})
