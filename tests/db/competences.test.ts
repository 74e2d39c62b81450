/** Competences: entering, correcting and taking back, with who and when kept. */
import { beforeEach, expect, test } from 'vitest'
import { parseValues } from '#app/server/form.server.ts'
import {
  changeCompetence,
  competencePage,
  competencesAtOneLook,
  competencesOf,
} from '#app/services/competences.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSite, createUser, type TestUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()

let ione: TestUser
let juniper: TestUser
let pim: TestUser
beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  juniper = await createUser(db, { roles: ['administrator'], name: 'Juniper' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
})

const LICENCE = {
  intent: 'competence-enter',
  kind: 'electrician-licence',
  number: 'QE-1187',
  startsAt: '2025-11-21',
  until: '2026-11-20',
  note: 'Card seen, both sides',
}

const change = (actor: TestUser, typed: Record<string, string>, of = pim.personId, on = db) =>
  changeCompetence(on, actor, MORNING, of, typed, parseValues)

test('a licence holds from the beginning of its first day to the end of its last, by site time', async () => {
  await change(ione, LICENCE)
  expect(await competencesOf(db, pim.personId)).toMatchObject([
    {
      personName: 'Pim',
      kind: 'electrician-licence',
      number: 'QE-1187',
      startsAt: new Date('2025-11-20T23:00:00Z'),
      endsAt: new Date('2026-11-20T23:00:00Z'),
      enteredBy: 'Ione',
      enteredAt: MORNING,
      replacedAt: null,
      note: 'Card seen, both sides',
    },
  ])
  const [line] = await listRecord(db, { limit: 1 })
  expect(line).toMatchObject({ act: 'competence entered', person: 'Ione', subjectId: String(pim.personId) })
})

test('a correction replaces the entry, keeps the old one readable and says who made each', async () => {
  await change(ione, LICENCE)
  const [first] = await competencesOf(db, pim.personId)
  const corrected = {
    ...LICENCE,
    intent: 'competence-correct',
    replaces: String(first?.id),
    until: '2027-11-20',
    note: 'Renewed card',
  }
  await change(juniper, corrected)
  const all = await competencesOf(db, pim.personId)
  expect(all.map(({ enteredBy, replacedAt, endsAt }) => ({ enteredBy, replacedAt, endsAt }))).toEqual([
    { enteredBy: 'Ione', replacedAt: MORNING, endsAt: new Date('2026-11-20T23:00:00Z') },
    { enteredBy: 'Juniper', replacedAt: null, endsAt: new Date('2027-11-20T23:00:00Z') },
  ])
  await expect(change(ione, corrected)).rejects.toMatchObject({ code: 'conflict' })
})

test('what never held is taken back with the reason', async () => {
  await change(ione, LICENCE)
  const [first] = await competencesOf(db, pim.personId)
  const back = { intent: 'competence-take-back', replaces: String(first?.id), reason: 'Card of a namesake' }
  await change(ione, back)
  expect((await competencesOf(db, pim.personId))[0]?.replacedAt).toEqual(MORNING)
  const { competences, without } = await competencesAtOneLook(db, MORNING)
  expect(competences).toEqual([])
  expect(without.map(({ name }) => name)).toContain('Pim')
  const [line] = await listRecord(db, { limit: 1 })
  expect(line).toMatchObject({ act: 'competence taken back', reason: 'Card of a namesake' })
})

test('only officers and the administrator enter them, and nobody their own', async () => {
  await expect(change(pim, LICENCE)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(change(ione, LICENCE, ione.personId)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(change(juniper, LICENCE, juniper.personId)).rejects.toMatchObject({ code: 'forbidden' })
  await change(juniper, LICENCE, ione.personId)
  await expect(competencePage(db, pim, ione.personId)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(competencePage(db, ione, 9999)).rejects.toMatchObject({ code: 'not-found' })
  expect((await competencePage(db, ione, ione.personId)).competences).toHaveLength(1)
})

test.each([
  [{ kind: '' }, 'kind'],
  [{ number: '' }, 'number'],
  [{ startsAt: '20.11.2026' }, 'startsAt'],
  [{ until: '2026-02-30' }, 'until'],
  [{ until: '2025-11-20' }, 'until'],
  [{ note: ' ' }, 'note'],
])('%o is refused at its field', async (wrong, field) => {
  await expect(change(ione, { ...LICENCE, ...wrong })).rejects.toMatchObject({
    code: 'bad-input',
    fields: { [field]: [expect.any(String)] },
  })
  expect(await competencesOf(db, pim.personId)).toEqual([])
})

test('a first and last day of one date is a day', async () => {
  await change(ione, { ...LICENCE, startsAt: '2026-11-20', until: '2026-11-20' })
  const [one] = await competencesOf(db, pim.personId)
  expect((one?.endsAt?.getTime() ?? 0) - (one?.startsAt.getTime() ?? 0)).toBe(86_400_000)
})

test('at one look: what has ended is left out, what is to come is in', async () => {
  await change(ione, LICENCE)
  expect((await competencesAtOneLook(db, MORNING)).competences).toHaveLength(1)
  const ended = new Date('2026-11-20T23:00:00Z')
  expect((await competencesAtOneLook(db, after(ended, -1))).competences).toHaveLength(1)
  expect((await competencesAtOneLook(db, ended)).competences).toHaveLength(0)
})

test('of two corrections at once one wins', async () => {
  await change(ione, LICENCE)
  const [first] = await competencesOf(db, pim.personId)
  const corrected = { ...LICENCE, intent: 'competence-correct', replaces: String(first?.id) }
  const outcomes = await Promise.allSettled([
    change(ione, { ...corrected, number: 'QE-1' }),
    change(juniper, { ...corrected, number: 'QE-2' }, pim.personId, other),
  ])
  expect(outcomes.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
  expect(
    (await competencesOf(db, pim.personId)).filter(({ replacedAt }) => replacedAt === null),
  ).toHaveLength(1)
})
