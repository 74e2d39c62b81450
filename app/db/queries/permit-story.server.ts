/** Everything that was done about one permit, table by table, for its story. */
import { aliasedTable, and, asc, eq, gte, lte } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import {
  boxLock,
  heatingStatement,
  isolationPoint,
  permitRound,
  permitRuling,
  permitSegment,
  permitTest,
  permitVersion,
  person,
  safetyEvent,
  segment,
} from '../schema/index.ts'

export type StoryPoint = typeof isolationPoint.$inferSelect
export type StoryBoxLock = typeof boxLock.$inferSelect
export type StoryTest = typeof permitTest.$inferSelect

/** Versions of what a permit says, oldest first. */
export async function listPermitVersions(db: DbOrTx, permitId: number) {
  return db
    .select({ version: permitVersion.version, content: permitVersion.content, reason: permitVersion.reason })
    .from(permitVersion)
    .where(eq(permitVersion.permitId, permitId))
    .orderBy(asc(permitVersion.version))
}

/** Locks that were ever applied to a permit's points, in order. */
export async function listStoryPoints(db: DbOrTx, permitId: number): Promise<StoryPoint[]> {
  return db
    .select()
    .from(isolationPoint)
    .where(eq(isolationPoint.permitId, permitId))
    .orderBy(asc(isolationPoint.appliedAt), asc(isolationPoint.id))
}

/** Locks that were ever on a permit's boxes, in order. */
export async function listStoryBoxLocks(db: DbOrTx, permitId: number): Promise<StoryBoxLock[]> {
  return db
    .select()
    .from(boxLock)
    .where(eq(boxLock.permitId, permitId))
    .orderBy(asc(boxLock.onAt), asc(boxLock.id))
}

/** Tests taken for a permit, in order. */
export async function listStoryTests(db: DbOrTx, permitId: number): Promise<StoryTest[]> {
  return db
    .select()
    .from(permitTest)
    .where(eq(permitTest.permitId, permitId))
    .orderBy(asc(permitTest.takenAt), asc(permitTest.id))
}

/** Rounds made for a permit, in order. */
export async function listStoryRounds(db: DbOrTx, permitId: number) {
  return db
    .select({ round: permitRound, who: person.name })
    .from(permitRound)
    .innerJoin(person, eq(person.id, permitRound.personId))
    .where(eq(permitRound.permitId, permitId))
    .orderBy(asc(permitRound.at), asc(permitRound.id))
}

/** Rulings given on a permit's conflicts, in order. */
export async function listStoryRulings(db: DbOrTx, permitId: number) {
  return db
    .select({ ruling: permitRuling, who: person.name })
    .from(permitRuling)
    .innerJoin(person, eq(person.id, permitRuling.ruledBy))
    .where(eq(permitRuling.permitId, permitId))
    .orderBy(asc(permitRuling.id))
}

const ender = aliasedTable(person, 'ender')
const tolerator = aliasedTable(person, 'tolerator')

/** Dangers noted for a permit, in order. */
export async function listStoryEvents(db: DbOrTx, permitId: number) {
  return db
    .select({ event: safetyEvent, endedByName: ender.name, toleratedByName: tolerator.name })
    .from(safetyEvent)
    .leftJoin(ender, eq(ender.id, safetyEvent.endedBy))
    .leftJoin(tolerator, eq(tolerator.id, safetyEvent.toleratedBy))
    .where(eq(safetyEvent.permitId, permitId))
    .orderBy(asc(safetyEvent.startedAt), asc(safetyEvent.id))
}

/** What people said of the heating of a permit's segments between two instants, in order. */
export async function listStoryHeating(db: DbOrTx, permitId: number, from: Date, to: Date) {
  return db
    .select({ statement: heatingStatement, who: person.name, segmentTag: segment.tag })
    .from(heatingStatement)
    .innerJoin(permitSegment, eq(permitSegment.segmentId, heatingStatement.segmentId))
    .innerJoin(segment, eq(segment.id, heatingStatement.segmentId))
    .innerJoin(person, eq(person.id, heatingStatement.personId))
    .where(
      and(eq(permitSegment.permitId, permitId), gte(heatingStatement.at, from), lte(heatingStatement.at, to)),
    )
    .orderBy(asc(heatingStatement.at), asc(heatingStatement.id))
}
