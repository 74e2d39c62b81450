/** Tests and rounds of permits, and the photos kept with them. */
import { and, asc, desc, eq } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { DbOrTx } from '../client.server.ts'
import { attachment, equipment, instrument, permitRound, permitTest, person } from '../schema/index.ts'

const tester = alias(person, 'tester')
const witness = alias(person, 'witness')

/** Every test taken for a permit, the last taken first. */
export async function listPermitTests(db: DbOrTx, permitId: number) {
  const rows = await db
    .select({ test: permitTest, testerName: tester.name, witnessName: witness.name })
    .from(permitTest)
    .innerJoin(tester, eq(tester.id, permitTest.testerId))
    .leftJoin(witness, eq(witness.id, permitTest.witnessId))
    .where(eq(permitTest.permitId, permitId))
    .orderBy(desc(permitTest.takenAt), desc(permitTest.id))
  return rows.map(({ test, ...names }) => ({ ...test, ...names }))
}
export type PermitTestRow = Awaited<ReturnType<typeof listPermitTests>>[number]

/** Adds a test. @returns its id */
export async function insertPermitTest(tx: DbOrTx, row: typeof permitTest.$inferInsert): Promise<number> {
  const [result] = await tx.insert(permitTest).values(row)
  return result.insertId
}

/** Every round of a permit, the last first. */
export async function listPermitRounds(db: DbOrTx, permitId: number) {
  const rows = await db
    .select({ round: permitRound, personName: person.name })
    .from(permitRound)
    .innerJoin(person, eq(person.id, permitRound.personId))
    .where(eq(permitRound.permitId, permitId))
    .orderBy(desc(permitRound.at), desc(permitRound.id))
  return rows.map(({ round, personName }) => ({ ...round, personName }))
}
export type PermitRoundRow = Awaited<ReturnType<typeof listPermitRounds>>[number]

/** Adds a round. @returns its id */
export async function insertPermitRound(tx: DbOrTx, row: typeof permitRound.$inferInsert): Promise<number> {
  const [result] = await tx.insert(permitRound).values(row)
  return result.insertId
}

/** Something of the register that a test can be taken with. */
export interface TestInstrument {
  serial: string
  /** What it measures; null where the register does not say. */
  quantity: string | null
  calibrationDue: Date | null
}

/** The instrument of a serial number, or the equipment of a tag, as the register has it; null when it has neither. */
export async function findTestInstrument(db: DbOrTx, serial: string): Promise<TestInstrument | null> {
  const instruments = await db
    .select({
      serial: instrument.serial,
      quantity: instrument.quantity,
      calibrationDue: instrument.calibrationDue,
    })
    .from(instrument)
    .where(eq(instrument.serial, serial))
  if (instruments[0] !== undefined) return instruments[0]
  const pieces = await db
    .select({ serial: equipment.tag, calibrationDue: equipment.calibrationDue })
    .from(equipment)
    .where(eq(equipment.tag, serial))
  return pieces[0] === undefined ? null : { ...pieces[0], quantity: null }
}

/** Files of one thing with who sent them, oldest first. */
export async function listPhotoRows(db: DbOrTx, subjectKind: string, subjectId: string) {
  return db
    .select({
      id: attachment.id,
      fileName: attachment.fileName,
      contentType: attachment.contentType,
      byteSize: attachment.byteSize,
      sha256: attachment.sha256,
      createdAt: attachment.createdAt,
      createdByName: person.name,
    })
    .from(attachment)
    .leftJoin(person, eq(person.id, attachment.createdBy))
    .where(
      and(
        eq(attachment.subjectKind, subjectKind),
        eq(attachment.subjectId, subjectId),
        eq(attachment.complete, true),
      ),
    )
    .orderBy(asc(attachment.id))
}
export type PhotoRow = Awaited<ReturnType<typeof listPhotoRows>>[number]
