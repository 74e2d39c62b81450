/** What the conflict rules of permits need to know beyond the permits themselves, and the rulings of officers. */
import { and, asc, eq, inArray, isNotNull, isNull } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import {
  holiday,
  isolationPoint,
  line,
  lockInUse,
  permitRuling,
  person,
  position,
  segment,
  valve,
} from '../schema/index.ts'

/** Locks that hang for permits; of those at an isolation point its tag, and whether somebody has verified it. */
export async function listHangingLocks(
  db: DbOrTx,
  permitIds: readonly number[],
): Promise<{ permitId: number; lockNumber: string; tag: string | null; verified: boolean }[]> {
  if (permitIds.length === 0) return []
  const rows = await db
    .select({
      permitId: lockInUse.permitId,
      lockNumber: lockInUse.lockNumber,
      tag: isolationPoint.tag,
      verifiedBy: isolationPoint.verifiedBy,
    })
    .from(lockInUse)
    .leftJoin(isolationPoint, eq(isolationPoint.id, lockInUse.pointId))
    .where(inArray(lockInUse.permitId, [...permitIds]))
    .orderBy(asc(lockInUse.lockNumber))
  return rows.map(({ verifiedBy, ...row }) => ({ ...row, verified: verifiedBy !== null }))
}

/** Gate valves with the segments on both sides. */
export async function listGateValves(db: DbOrTx) {
  const west = db.select({ id: segment.id, tag: segment.tag }).from(segment).as('west')
  const east = db.select({ id: segment.id, tag: segment.tag }).from(segment).as('east')
  return db
    .select({
      tag: valve.tag,
      west: west.tag,
      east: east.tag,
      line: line.code,
      atM: valve.chainageM,
      limitC: valve.limitC,
      partRiseShare: valve.partRiseShare,
    })
    .from(valve)
    .innerJoin(line, eq(line.id, valve.lineId))
    .leftJoin(west, eq(west.id, valve.segmentId))
    .leftJoin(east, eq(east.id, valve.eastSegmentId))
    .where(eq(valve.kind, 'gate'))
    .orderBy(asc(valve.tag))
}

/** Extraction fans of the bays with their places. */
export async function listBayFans(db: DbOrTx): Promise<{ tag: string; line: string; atM: number }[]> {
  const rows = await db
    .select({ tag: position.tag, line: line.code, atM: position.chainageM })
    .from(position)
    .innerJoin(line, eq(line.id, position.lineId))
    .where(and(eq(position.kind, 'bay-fan'), isNull(position.retiredAt), isNotNull(position.chainageM)))
    .orderBy(asc(position.chainageM))
  return rows.flatMap(({ atM, ...fan }) => (atM === null ? [] : [{ ...fan, atM }]))
}

/** Days without a crew, with their names. */
export function listNamedHolidays(db: DbOrTx): Promise<{ day: string; name: string }[]> {
  return db.select().from(holiday).orderBy(asc(holiday.day))
}

export interface RulingRow {
  conflictKey: string
  facts: string
  allowed: boolean
  text: string
  by: string
  at: Date
}

/** Rulings on a permit's conflicts, oldest first: of one conflict the last holds. */
export function listRulings(db: DbOrTx, permitId: number): Promise<RulingRow[]> {
  return db
    .select({
      conflictKey: permitRuling.conflictKey,
      facts: permitRuling.facts,
      allowed: permitRuling.allowed,
      text: permitRuling.text,
      by: person.name,
      at: permitRuling.ruledAt,
    })
    .from(permitRuling)
    .innerJoin(person, eq(person.id, permitRuling.ruledBy))
    .where(eq(permitRuling.permitId, permitId))
    .orderBy(asc(permitRuling.id))
}

export async function insertRuling(tx: DbOrTx, row: typeof permitRuling.$inferInsert): Promise<void> {
  await tx.insert(permitRuling).values(row)
}
