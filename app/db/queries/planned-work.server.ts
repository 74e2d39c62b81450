/** Work by others in the tunnel. */
import { and, desc, eq, inArray } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { PlannedWorkState } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import { line, person, plannedWork, segment } from '../schema/index.ts'

const ruler = alias(person, 'ruler')
const ownLine = alias(line, 'own_line')
const segmentLine = alias(line, 'segment_line')

export type PlannedWorkRow = typeof plannedWork.$inferSelect & {
  lineCode: string | null
  segmentTag: string | null
  segmentStartM: number | null
  segmentEndM: number | null
  createdByName: string
  ruledByName: string | null
}

function select(db: DbOrTx) {
  return db
    .select({
      work: plannedWork,
      ownLine: ownLine.code,
      segmentLine: segmentLine.code,
      segmentTag: segment.tag,
      segmentStartM: segment.startM,
      segmentEndM: segment.endM,
      createdByName: person.name,
      ruledByName: ruler.name,
    })
    .from(plannedWork)
    .innerJoin(person, eq(person.id, plannedWork.createdBy))
    .leftJoin(ruler, eq(ruler.id, plannedWork.ruledBy))
    .leftJoin(ownLine, eq(ownLine.id, plannedWork.lineId))
    .leftJoin(segment, eq(segment.id, plannedWork.segmentId))
    .leftJoin(segmentLine, eq(segmentLine.id, segment.lineId))
}

type Row = Awaited<ReturnType<typeof select>>[number]

function read({ work, ownLine, segmentLine, ...names }: Row): PlannedWorkRow {
  return { ...work, ...names, lineCode: segmentLine ?? ownLine }
}

/** Works in some states, or all, by their beginning. */
export async function listPlannedWorks(
  db: DbOrTx,
  filter: { states?: readonly PlannedWorkState[] } = {},
): Promise<PlannedWorkRow[]> {
  const rows = await select(db)
    .where(filter.states === undefined ? undefined : inArray(plannedWork.state, [...filter.states]))
    .orderBy(desc(plannedWork.startsAt), desc(plannedWork.id))
  return rows.map(read)
}

/** One piece of work, or null. */
export async function findPlannedWork(db: DbOrTx, id: number): Promise<PlannedWorkRow | null> {
  const rows = await select(db).where(eq(plannedWork.id, id))
  return rows[0] === undefined ? null : read(rows[0])
}

/** Locks the work's row until the transaction ends and gives it as it is now, or null. */
export async function lockPlannedWork(tx: DbOrTx, id: number): Promise<PlannedWorkRow | null> {
  await tx.select({ id: plannedWork.id }).from(plannedWork).where(eq(plannedWork.id, id)).for('update')
  return findPlannedWork(tx, id)
}

export async function insertPlannedWork(tx: DbOrTx, row: typeof plannedWork.$inferInsert): Promise<number> {
  const [result] = await tx.insert(plannedWork).values(row)
  return result.insertId
}

/**
 * Changes a piece of work that still has the revision its reader saw, and raises it.
 *
 * @returns whether it did; false when somebody else was faster
 */
export async function updatePlannedWork(
  tx: DbOrTx,
  id: number,
  revision: number,
  change: Partial<typeof plannedWork.$inferInsert>,
): Promise<boolean> {
  const [result] = await tx
    .update(plannedWork)
    .set({ ...change, revision: revision + 1 })
    .where(and(eq(plannedWork.id, id), eq(plannedWork.revision, revision)))
  return result.affectedRows === 1
}
