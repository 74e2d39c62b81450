import { and, desc, eq, gte, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import { IsolationFindingSchema } from '../../domain/isolation-tests.ts'
import type { DbOrTx } from '../client.server.ts'
import { isolationTest, person, position, segment } from '../schema/index.ts'

const recorder = alias(person, 'recorder')
const accepter = alias(person, 'accepter')
const voider = alias(person, 'voider')

function select(db: DbOrTx) {
  return db
    .select({
      test: isolationTest,
      segmentTag: segment.tag,
      positionTag: position.tag,
      recordedByName: recorder.name,
      acceptedByName: accepter.name,
      voidedByName: voider.name,
    })
    .from(isolationTest)
    .innerJoin(segment, eq(segment.id, isolationTest.segmentId))
    .innerJoin(position, eq(position.id, isolationTest.positionId))
    .innerJoin(recorder, eq(recorder.id, isolationTest.recordedBy))
    .leftJoin(accepter, eq(accepter.id, isolationTest.acceptedBy))
    .leftJoin(voider, eq(voider.id, isolationTest.voidedBy))
}

function read({ test, ...names }: Awaited<ReturnType<typeof select>>[number]) {
  return { ...test, ...names, finding: IsolationFindingSchema.parse(test.result) }
}
export type IsolationTestRow = ReturnType<typeof read>

/** One test, or null. */
export async function findIsolationTest(db: DbOrTx, id: number): Promise<IsolationTestRow | null> {
  const rows = await select(db).where(eq(isolationTest.id, id))
  return rows[0] === undefined ? null : read(rows[0])
}

/** Tests of a segment, the last closed first. */
export async function listIsolationTests(
  db: DbOrTx,
  segmentId: number,
  limit: number,
): Promise<IsolationTestRow[]> {
  const rows = await select(db)
    .where(eq(isolationTest.segmentId, segmentId))
    .orderBy(desc(isolationTest.closedAt), desc(isolationTest.id))
    .limit(limit)
  return rows.map(read)
}

/** The last accepted test of a segment whose valve was closed at or after an instant (null: ever). */
export async function lastAcceptedTest(
  db: DbOrTx,
  segmentId: number,
  since: Date | null,
): Promise<IsolationTestRow | null> {
  const rows = await select(db)
    .where(
      and(
        eq(isolationTest.segmentId, segmentId),
        eq(isolationTest.state, 'accepted'),
        since === null ? undefined : gte(isolationTest.closedAt, since),
      ),
    )
    .orderBy(desc(isolationTest.closedAt), desc(isolationTest.id))
    .limit(1)
  return rows[0] === undefined ? null : read(rows[0])
}

export async function insertIsolationTest(
  db: DbOrTx,
  row: typeof isolationTest.$inferInsert,
): Promise<number> {
  const [result] = await db.insert(isolationTest).values(row)
  return result.insertId
}

/** Changes a test that is still as it was seen; false when somebody else was first. */
export async function updateIsolationTest(
  db: DbOrTx,
  seen: { id: number; revision: number },
  set: Partial<typeof isolationTest.$inferInsert>,
): Promise<boolean> {
  const [result] = await db
    .update(isolationTest)
    .set({ ...set, revision: sql`${isolationTest.revision} + 1` })
    .where(and(eq(isolationTest.id, seen.id), eq(isolationTest.revision, seen.revision)))
  return result.affectedRows === 1
}
