import { eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { verifyPassword } from '#app/auth/password.ts'
import { insertSession } from '#app/db/queries/sessions.server.ts'
import { person, record, roleGrant, session } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import type { DomainError } from '#app/domain/errors.ts'
import { type Role, rolesAt } from '#app/domain/roles.ts'
import type { GrantForm, NewPersonForm } from '#app/domain/schemas/people.ts'
import { decideGrant, endGrant, grantRole } from '#app/services/grants.server.ts'
import {
  addPerson,
  countWaitingFor,
  readPeople,
  readPerson,
  readWaiting,
  setAccountEnd,
} from '#app/services/people.server.ts'
import { readRecordPage } from '#app/services/people-record.server.ts'
import { MORNING, after as shift } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSite, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const DAY = 86_400
let juniper: Actor
let ione: Actor
let tove: Actor

beforeEach(async () => {
  await createSite(db)
  juniper = await createUser(db, { roles: ['administrator'], name: 'Juniper' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  tove = await createUser(db, { name: 'Tove' })
})

function refusal(work: Promise<unknown>): Promise<DomainError> {
  return work.then(
    () => {
      throw new Error('was not refused')
    },
    (error: DomainError) => error,
  )
}

function grant(role: Role, changes: Partial<GrantForm> = {}): GrantForm {
  return { role, startsAt: MORNING, until: null, reason: 'Needed for the job', ...changes }
}

/** Roles as every other part of the product works them out. */
async function rolesOf({ personId }: Actor, at: Date): Promise<Role[]> {
  return rolesAt(await db.select().from(roleGrant).where(eq(roleGrant.personId, personId)), at)
}

describe('granting roles', () => {
  it('gives a role between its dates and records who gave it', async () => {
    expect(
      await grantRole(
        db,
        juniper,
        MORNING,
        tove.personId,
        grant('contributor', { until: shift(MORNING, DAY) }),
      ),
    ).toEqual({ waits: false })
    expect(await rolesOf(tove, shift(MORNING, -1))).toEqual([])
    expect(await rolesOf(tove, MORNING)).toEqual(['contributor'])
    expect(await rolesOf(tove, shift(MORNING, DAY))).toEqual([])
    const [line] = await db.select().from(record)
    expect(line).toMatchObject({
      personId: juniper.personId,
      act: 'role granted',
      subjectId: String(tove.personId),
      reason: 'Needed for the job',
    })
  })

  it('takes a role away at once and keeps it readable', async () => {
    await grantRole(db, juniper, MORNING, tove.personId, grant('technician'))
    const [given] = (await readPerson(db, juniper, tove.personId, MORNING)).grants
    const later = shift(MORNING, 60)
    await endGrant(db, juniper, later, { grantId: given?.id ?? 0, reason: 'Left the crew' }, tove.personId)
    expect(await rolesOf(tove, MORNING)).toEqual(['technician'])
    expect(await rolesOf(tove, later)).toEqual([])
    const { grants } = await readPerson(db, juniper, tove.personId, later)
    expect(grants).toMatchObject([{ standing: 'ended', revokedBy: 'Juniper', revokeReason: 'Left the crew' }])
  })

  it('refuses the past, a role held already, people who do not sign in, and everybody but administrators', async () => {
    const past = await refusal(
      grantRole(db, juniper, MORNING, tove.personId, grant('technician', { startsAt: shift(MORNING, -DAY) })),
    )
    expect(Object.keys(past.fields)).toEqual(['startsAt'])
    await grantRole(db, juniper, MORNING, tove.personId, grant('technician'))
    expect(
      Object.keys(
        (await refusal(grantRole(db, juniper, MORNING, tove.personId, grant('technician')))).fields,
      ),
    ).toEqual(['role'])
    const wendel = await createUser(db, { name: 'Wendel', noPassword: true })
    expect(
      Object.keys(
        (await refusal(grantRole(db, juniper, MORNING, wendel.personId, grant('technician')))).fields,
      ),
    ).toEqual(['role'])
    for (const role of ['technician', 'engineer', 'safety-officer', 'manager', 'contributor'] as const) {
      const actor = await createUser(db, { roles: [role] })
      expect(
        await refusal(grantRole(db, actor, MORNING, tove.personId, grant('engineer'))),
        role,
      ).toMatchObject({ code: 'forbidden' })
      expect(await refusal(readPeople(db, actor, MORNING)), role).toMatchObject({ code: 'forbidden' })
    }
  })

  it('gives a role once when two administrators give it at once', async () => {
    const results = await Promise.allSettled(
      [db, other].map((each) => grantRole(each, juniper, MORNING, tove.personId, grant('technician'))),
    )
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
    expect(await db.select().from(roleGrant).where(eq(roleGrant.personId, tove.personId))).toHaveLength(1)
  })
})

describe('a role that somebody gives to themselves', () => {
  let grantId: number

  beforeEach(async () => {
    expect(await grantRole(db, juniper, MORNING, juniper.personId, grant('safety-officer'))).toEqual({
      waits: true,
    })
    const [waiting] = await readWaiting(db, ione)
    grantId = waiting?.id ?? 0
  })

  const decide = (actor: Actor, decision: 'confirm' | 'refuse', at: Date) =>
    decideGrant(db, actor, at, { grantId, decision, reason: 'Talked it over' })

  it('is not held until another person has confirmed it, and never before that', async () => {
    await grantRole(db, juniper, MORNING, juniper.personId, grant('manager'))
    const asked = (await readWaiting(db, ione)).find(({ role }) => role === 'manager')
    const later = shift(MORNING, DAY)
    expect(await rolesOf(juniper, later)).toEqual(['administrator'])
    await decideGrant(db, ione, later, { grantId: asked?.id ?? 0, decision: 'confirm', reason: 'Covers' })
    expect(await rolesOf(juniper, shift(later, -1))).toEqual(['administrator'])
    expect(await rolesOf(juniper, later)).toEqual(['manager', 'administrator'])
    const { grants } = await readPerson(db, juniper, juniper.personId, later)
    expect(grants.find(({ role }) => role === 'manager')).toMatchObject({
      standing: 'in-force',
      confirmedBy: 'Ione',
      grantedBy: 'Juniper',
    })
  })

  it('that approves what others plan begins a day after it was confirmed', async () => {
    const confirmed = shift(MORNING, DAY)
    const begins = shift(confirmed, DAY)
    await decide(ione, 'confirm', confirmed)
    expect(await rolesOf(juniper, shift(begins, -1))).toEqual(['administrator'])
    expect(await rolesOf(juniper, begins)).toEqual(['safety-officer', 'administrator'])
    const standingAt = async (at: Date) =>
      (await readPerson(db, juniper, juniper.personId, at)).grants.find(({ id }) => id === grantId)?.standing
    expect(await standingAt(confirmed)).toBe('coming')
    expect(await standingAt(begins)).toBe('in-force')
  })

  it('that asks for a later beginning keeps it', async () => {
    await decide(ione, 'refuse', MORNING)
    const begins = shift(MORNING, 5 * DAY)
    await grantRole(db, juniper, MORNING, juniper.personId, {
      ...grant('safety-officer'),
      startsAt: begins,
    })
    const [waiting] = await readWaiting(db, ione)
    await decideGrant(db, ione, MORNING, {
      grantId: waiting?.id ?? 0,
      decision: 'confirm',
      reason: 'For the holidays',
    })
    expect(await rolesOf(juniper, shift(begins, -1))).toEqual(['administrator'])
    expect(await rolesOf(juniper, begins)).toEqual(['safety-officer', 'administrator'])
  })

  it('is not confirmed when its last day would be over before it began', async () => {
    await decide(ione, 'refuse', MORNING)
    await grantRole(db, juniper, MORNING, juniper.personId, {
      ...grant('safety-officer'),
      until: shift(MORNING, DAY),
    })
    const [waiting] = await readWaiting(db, ione)
    const decision = { grantId: waiting?.id ?? 0, decision: 'confirm', reason: 'For today' } as const
    expect(await refusal(decideGrant(db, ione, MORNING, decision))).toMatchObject({ code: 'conflict' })
  })

  it('cannot be confirmed by herself, nor by somebody without a say', async () => {
    expect(await refusal(decide(juniper, 'confirm', MORNING))).toMatchObject({ code: 'forbidden' })
    const pim = await createUser(db, { roles: ['technician'] })
    expect(await refusal(decide(pim, 'confirm', MORNING))).toMatchObject({ code: 'forbidden' })
    expect(await rolesOf(juniper, shift(MORNING, DAY))).toEqual(['administrator'])
  })

  it('is decided once', async () => {
    await decide(ione, 'refuse', MORNING)
    const error = await refusal(decide(ione, 'confirm', MORNING))
    expect(error).toMatchObject({ code: 'conflict' })
    expect(error.message).toContain('Ione has decided it')
    expect(await rolesOf(juniper, shift(MORNING, DAY))).toEqual(['administrator'])
    expect(await readWaiting(db, ione)).toEqual([])
  })

  it('shows as waiting to administrators and cannot be asked for twice', async () => {
    expect((await readPeople(db, juniper, MORNING)).waiting).toBe(1)
    expect(await readWaiting(db, juniper)).toMatchObject([
      { person: 'Juniper', role: 'safety-officer', own: true },
    ])
    // Those who may decide it are told; she and those without a say are not.
    expect(await countWaitingFor(db, ione)).toBe(1)
    expect(await countWaitingFor(db, juniper)).toBe(0)
    expect(await countWaitingFor(db, await createUser(db, { roles: ['engineer'] }))).toBe(0)
    const twice = await refusal(grantRole(db, juniper, MORNING, juniper.personId, grant('safety-officer')))
    expect(twice.fields.role?.[0]).toContain('waits for')
  })
})

describe('accounts', () => {
  const form: NewPersonForm = {
    name: 'Nerys Copper',
    email: 'nerys@example.test',
    password: 'three words and one',
    role: 'technician',
    until: shift(MORNING, DAY),
    note: '',
    reason: 'New in crew B',
  }

  it('makes one with its role, its last day and a hashed password', async () => {
    const personId = await addPerson(db, juniper, MORNING, form)
    const [row] = await db.select().from(person).where(eq(person.id, personId))
    expect(row).toMatchObject({ name: 'Nerys Copper', endsAt: form.until })
    expect(await verifyPassword(row?.passwordHash ?? '', form.password)).toBe(true)
    expect(await rolesOf({ personId, name: '', roles: [] }, MORNING)).toEqual(['technician'])
    expect(JSON.stringify(await db.select().from(record))).not.toContain('three words')
  })

  it('refuses a taken address or name, and a day that is over', async () => {
    await addPerson(db, juniper, MORNING, form)
    expect(
      Object.keys(
        (
          await refusal(
            addPerson(db, juniper, MORNING, { ...form, name: 'Else', email: 'NERYS@example.test' }),
          )
        ).fields,
      ),
    ).toEqual(['email'])
    expect(
      Object.keys(
        (await refusal(addPerson(db, juniper, MORNING, { ...form, email: 'other@example.test' }))).fields,
      ),
    ).toEqual(['name'])
    expect(
      Object.keys((await refusal(addPerson(db, juniper, MORNING, { ...form, until: MORNING }))).fields),
    ).toEqual(['until'])
    expect(await refusal(addPerson(db, ione, MORNING, form))).toMatchObject({ code: 'forbidden' })
  })

  it('ends an account at once and signs the person out', async () => {
    await insertSession(db, {
      tokenHash: 'x',
      personId: tove.personId,
      createdAt: MORNING,
      lastSeenAt: MORNING,
      expiresAt: shift(MORNING, DAY),
    })
    await setAccountEnd(db, juniper, MORNING, tove.personId, {
      seen: '',
      until: null,
      now: true,
      reason: 'Contract over',
    })
    const [row] = await db.select().from(person).where(eq(person.id, tove.personId))
    expect(row?.endsAt).toEqual(MORNING)
    expect(await db.select().from(session)).toEqual([])
  })

  it('does not go over an end that somebody else has just set', async () => {
    await setAccountEnd(db, juniper, MORNING, tove.personId, {
      seen: '',
      until: shift(MORNING, DAY),
      now: false,
      reason: 'Contract over',
    })
    const error = await refusal(
      setAccountEnd(db, juniper, MORNING, tove.personId, {
        seen: '',
        until: null,
        now: true,
        reason: 'Contract over',
      }),
    )
    expect(error).toMatchObject({ code: 'conflict' })
  })

  it('never leaves the site without an administrator', async () => {
    const [own] = (await readPerson(db, juniper, juniper.personId, MORNING)).grants
    const taken = await refusal(
      endGrant(db, juniper, MORNING, { grantId: own?.id ?? 0, reason: 'Moving on' }, juniper.personId),
    )
    expect(taken).toMatchObject({ code: 'conflict' })
    const ended = await refusal(
      setAccountEnd(db, juniper, MORNING, juniper.personId, {
        seen: '',
        until: shift(MORNING, DAY),
        now: false,
        reason: 'Moving on',
      }),
    )
    expect(ended).toMatchObject({ code: 'conflict' })
    expect(await rolesOf(juniper, shift(MORNING, 2 * DAY))).toEqual(['administrator'])
    await grantRole(db, juniper, MORNING, tove.personId, grant('administrator'))
    await endGrant(db, juniper, MORNING, { grantId: own?.id ?? 0, reason: 'Moving on' }, juniper.personId)
    expect(await rolesOf(juniper, shift(MORNING, 1))).toEqual([])
  })

  it('keeps one administrator when two take the role from each other at once', async () => {
    const second = await createUser(db, { roles: ['administrator'], name: 'Second' })
    const [a] = (await readPerson(db, juniper, juniper.personId, MORNING)).grants
    const [b] = (await readPerson(db, juniper, second.personId, MORNING)).grants
    const results = await Promise.allSettled([
      endGrant(db, juniper, MORNING, { grantId: b?.id ?? 0, reason: 'No longer' }, second.personId),
      endGrant(other, second, MORNING, { grantId: a?.id ?? 0, reason: 'No longer' }, juniper.personId),
    ])
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
  })
})

describe('the record of who did what', () => {
  it('can be narrowed by person and kind, and ignores a filter that means nothing', async () => {
    await grantRole(db, juniper, MORNING, tove.personId, grant('technician'))
    const all = await readRecordPage(db, juniper, new URLSearchParams('person=999999&kind=nothing&before=x'))
    expect(all.lines).toMatchObject([
      { person: 'Juniper', act: 'role granted', subject: 'person Tove', reason: 'Needed for the job' },
    ])
    expect(all).toMatchObject({
      filter: { person: '', kind: '', before: '' },
      kinds: ['person'],
      older: null,
    })
    expect((await readRecordPage(db, juniper, new URLSearchParams(`person=${ione.personId}`))).lines).toEqual(
      [],
    )
    expect((await readRecordPage(db, juniper, new URLSearchParams('kind=person'))).lines).toHaveLength(1)
    expect(await refusal(readRecordPage(db, ione, new URLSearchParams()))).toMatchObject({
      code: 'forbidden',
    })
  })
})
