/**
 * Competences and licences of people, as an officer or the administrator enters them from what was shown. The product
 * knows that a number and an end were entered; it does not certify that anybody can do anything.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type CompetenceRow,
  insertCompetence,
  listCompetences,
  replaceCompetence,
} from '../db/queries/competences.server.ts'
import { findPerson, listPeople } from '../db/queries/people.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { COMPETENCE_LABELS } from '../domain/permit-words.ts'
import {
  type CompetenceForm,
  correctedCompetenceSchema,
  newCompetenceSchema,
  TakeBackCompetenceSchema,
} from '../domain/schemas/competence.ts'
import { writeRecord } from './record.server.ts'
import type { Parse } from './register-change.server.ts'
import { getSite } from './site.server.ts'

export type { CompetenceRow }

/** Competences of one person, corrected ones included, so that it stays readable what was once relied on. */
export function competencesOf(db: DbOrTx, personId: number): Promise<CompetenceRow[]> {
  return listCompetences(db, { personIds: [personId], replaced: true })
}

/** Competences of everybody that have not ended at an instant, by name, and the people who have none. */
export async function competencesAtOneLook(
  db: DbOrTx,
  at: Date,
): Promise<{ competences: CompetenceRow[]; without: { id: number; name: string }[] }> {
  const open = (endsAt: Date | null) => endsAt === null || endsAt > at
  const [all, people] = await Promise.all([listCompetences(db), listPeople(db)])
  const competences = all.filter(({ endsAt }) => open(endsAt))
  const without = people.filter(
    ({ id, endsAt }) => open(endsAt) && !competences.some(({ personId }) => personId === id),
  )
  return { competences, without: without.map(({ id, name }) => ({ id, name })) }
}

/**
 * Who a page about somebody's competences is about.
 *
 * @throws DomainError forbidden, not-found
 */
export async function competencePage(
  db: DbOrTx,
  actor: Actor,
  personId: number,
): Promise<{ person: { id: number; name: string; note: string }; competences: CompetenceRow[] }> {
  demand(actor, 'competence:edit')
  const { id, name, note } = await existing(db, personId)
  return { person: { id, name, note }, competences: await competencesOf(db, id) }
}

/**
 * Makes the change to somebody's competences that a posted form asks for: enter, correct or take back.
 *
 * @returns what has been done, as a sentence
 * @throws DomainError forbidden (also for one's own), not-found, bad-input, conflict (corrected meanwhile)
 */
export async function changeCompetence(
  db: Db,
  actor: Actor,
  now: Date,
  personId: number,
  typed: Readonly<Record<string, string>>,
  parse: Parse,
): Promise<string> {
  demand(actor, 'competence:edit')
  const person = await existing(db, personId)
  if (person.id === actor.personId) {
    throw new DomainError(
      'forbidden',
      'What you may do is entered by somebody else: another safety officer or the administrator.',
    )
  }
  const { timeZone } = await getSite(db)
  if (typed.intent === 'competence-enter') {
    await enter(db, actor, now, person, parse(newCompetenceSchema(timeZone), typed))
    return 'Entered.'
  }
  if (typed.intent === 'competence-correct') {
    const { replaces, ...form } = parse(correctedCompetenceSchema(timeZone), typed)
    await correct(db, actor, now, person, { id: replaces, form, reason: form.note })
    return 'Corrected. What stood there before stays readable.'
  }
  if (typed.intent === 'competence-take-back') {
    const { replaces, reason } = parse(TakeBackCompetenceSchema, typed)
    await correct(db, actor, now, person, { id: replaces, form: null, reason })
    return 'Taken back. It stays readable as what was once entered.'
  }
  throw new DomainError('bad-input', 'This page has no such form; nothing has been saved. Load it again.')
}

async function existing(db: DbOrTx, personId: number) {
  const person = Number.isSafeInteger(personId) ? await findPerson(db, personId) : null
  if (person !== null) return person
  throw new DomainError('not-found', 'There is no such person. People lists those there are.')
}

type Person = Awaited<ReturnType<typeof existing>>

function rowOf({ kind, number, startsAt, until, note }: CompetenceForm) {
  return { kind, number, startsAt, endsAt: until, note }
}

function subject(person: Person) {
  return { subjectKind: 'person', subjectId: String(person.id) }
}

async function enter(db: Db, actor: Actor, now: Date, person: Person, form: CompetenceForm): Promise<void> {
  await tx(db, async (inside) => {
    const row = rowOf(form)
    const same = (await listCompetences(inside, { personIds: [person.id], kind: form.kind })).find(
      (one) =>
        one.number === row.number &&
        one.startsAt.getTime() === row.startsAt.getTime() &&
        one.endsAt?.getTime() === row.endsAt?.getTime(),
    )
    if (same !== undefined) {
      throw new DomainError(
        'conflict',
        `${same.enteredBy} has entered just this already. Nothing has been saved.`,
      )
    }
    await insertCompetence(inside, { personId: person.id, ...row, enteredBy: actor.personId, enteredAt: now })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'competence entered',
      ...subject(person),
      effectiveAt: row.startsAt,
      after: { person: person.name, ...row, kind: COMPETENCE_LABELS[row.kind] },
      reason: form.note,
    })
  })
}

async function correct(
  db: Db,
  actor: Actor,
  now: Date,
  person: Person,
  change: { id: number; form: CompetenceForm | null; reason: string },
): Promise<void> {
  await tx(db, async (inside) => {
    const before = (await listCompetences(inside, { personIds: [person.id], replaced: true })).find(
      ({ id }) => id === change.id,
    )
    if (before === undefined)
      throw new DomainError('not-found', `${person.name} has no such competence. Load the page again.`)
    if (!(await replaceCompetence(inside, change.id, now))) {
      throw new DomainError(
        'conflict',
        'This entry has been corrected or taken back since the page was loaded. Nothing of yours has been saved; look at what stands there now.',
      )
    }
    if (change.form !== null) {
      await insertCompetence(inside, {
        personId: person.id,
        ...rowOf(change.form),
        enteredBy: actor.personId,
        enteredAt: now,
      })
    }
    const { kind, number, startsAt, endsAt, note } = before
    await writeRecord(inside, {
      at: now,
      actor,
      act: change.form === null ? 'competence taken back' : 'competence corrected',
      ...subject(person),
      before: { person: person.name, kind: COMPETENCE_LABELS[kind], number, startsAt, endsAt, note },
      after:
        change.form === null ? null : { ...rowOf(change.form), kind: COMPETENCE_LABELS[change.form.kind] },
      reason: change.reason,
    })
  })
}
