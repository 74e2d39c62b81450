/** The record of who did what, as a page: narrowed by person and kind of thing, newest first, a hundred lines at a time. */
import type { Db } from '../db/client.server.ts'
import { listPeople, listRecordedKinds } from '../db/queries/people.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { listRecord } from './record.server.ts'

const PAGE = 100

export interface RecordLine {
  id: number
  at: Date
  person: string | null
  act: string
  /** What it was done to, in words. */
  subject: string
  effectiveAt: Date | null
  reason: string
  signed: boolean
  /** Before and after as stored, for reading; empty where the act had none. */
  before: string
  after: string
}

export interface RecordPage {
  lines: RecordLine[]
  filter: { person: string; kind: string; before: string }
  people: { id: number; name: string }[]
  kinds: string[]
  /** Where the next, older page begins; null on the last one. */
  older: number | null
}

function wholeNumber(text: string | null): number | undefined {
  return text !== null && /^\d{1,15}$/.test(text) ? Number(text) : undefined
}

/** Reads the filter leniently (an unknown value is no filter) and finds the page. */
export async function readRecordPage(db: Db, actor: Actor, query: URLSearchParams): Promise<RecordPage> {
  demand(actor, 'people:view')
  const [people, kinds] = await Promise.all([listPeople(db), listRecordedKinds(db)])
  const personId = wholeNumber(query.get('person'))
  const person = people.find(({ id }) => id === personId)
  const kind = kinds.find((each) => each === query.get('kind'))
  const beforeId = wholeNumber(query.get('before'))
  // One more than a page tells whether there is another.
  const found = await listRecord(db, {
    ...(person === undefined ? {} : { personId: person.id }),
    ...(kind === undefined ? {} : { subjectKind: kind }),
    ...(beforeId === undefined ? {} : { beforeId }),
    limit: PAGE + 1,
  })
  const lines = found.slice(0, PAGE)
  const names = new Map(people.map(({ id, name }) => [String(id), name]))
  return {
    lines: lines.map(
      ({ id, at, person: who, act, subjectKind, subjectId, effectiveAt, reason, signed, before, after }) => ({
        id,
        at,
        person: who,
        act,
        subject:
          subjectKind === 'person'
            ? `person ${names.get(subjectId) ?? subjectId}`
            : `${subjectKind} ${subjectId}`,
        effectiveAt,
        reason,
        signed,
        before: stored(before),
        after: stored(after),
      }),
    ),
    filter: {
      person: person === undefined ? '' : String(person.id),
      kind: kind ?? '',
      before: beforeId === undefined ? '' : String(beforeId),
    },
    people: people.map(({ id, name }) => ({ id, name })),
    kinds,
    older: found.length > PAGE ? (lines.at(-1)?.id ?? null) : null,
  }
}

function stored(value: unknown): string {
  return value === null || value === undefined ? '' : JSON.stringify(value, null, 1)
}
