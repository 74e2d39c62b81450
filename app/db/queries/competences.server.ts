/** Competences and licences as they were entered. A correction replaces a row and never edits it. */
import { aliasedTable, and, asc, eq, inArray, isNull } from 'drizzle-orm'
import type { CompetenceKind } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import { competence, person } from '../schema/index.ts'

export interface CompetenceRow {
  id: number
  personId: number
  personName: string
  kind: CompetenceKind
  number: string
  startsAt: Date
  /** First instant at which it no longer holds; null for good. */
  endsAt: Date | null
  enteredBy: string
  enteredAt: Date
  replacedAt: Date | null
  note: string
}

/** Competences, of all people or of some, of all kinds or of one; those that were corrected only when asked for. */
export async function listCompetences(
  db: DbOrTx,
  filter: { personIds?: readonly number[]; kind?: CompetenceKind; replaced?: boolean } = {},
): Promise<CompetenceRow[]> {
  const enterer = aliasedTable(person, 'enterer')
  const { personIds, kind, replaced = false } = filter
  return db
    .select({
      id: competence.id,
      personId: competence.personId,
      personName: person.name,
      kind: competence.kind,
      number: competence.number,
      startsAt: competence.startsAt,
      endsAt: competence.endsAt,
      enteredBy: enterer.name,
      enteredAt: competence.enteredAt,
      replacedAt: competence.replacedAt,
      note: competence.note,
    })
    .from(competence)
    .innerJoin(person, eq(person.id, competence.personId))
    .innerJoin(enterer, eq(enterer.id, competence.enteredBy))
    .where(
      and(
        personIds === undefined ? undefined : inArray(competence.personId, [...personIds, 0]),
        kind === undefined ? undefined : eq(competence.kind, kind),
        replaced ? undefined : isNull(competence.replacedAt),
      ),
    )
    .orderBy(asc(person.name), asc(competence.kind), asc(competence.startsAt), asc(competence.id))
}

export async function insertCompetence(tx: DbOrTx, row: typeof competence.$inferInsert): Promise<number> {
  const [result] = await tx.insert(competence).values(row)
  return result.insertId
}

/**
 * Takes a competence out of what holds.
 *
 * @returns whether it still held; false when somebody else was faster
 */
export async function replaceCompetence(tx: DbOrTx, id: number, at: Date): Promise<boolean> {
  const [result] = await tx
    .update(competence)
    .set({ replacedAt: at })
    .where(and(eq(competence.id, id), isNull(competence.replacedAt)))
  return result.affectedRows === 1
}
