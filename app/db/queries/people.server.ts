import { aliasedTable, and, asc, desc, eq, isNotNull, isNull } from 'drizzle-orm'
import type { Role } from '../../domain/roles.ts'
import type { DbOrTx } from '../client.server.ts'
import { person, record, roleGrant, session } from '../schema/index.ts'

export interface PersonForSignIn {
  id: number
  passwordHash: string | null
  endsAt: Date | null
}

/** The account with an address (compared without case by the collation), or null. */
export async function findPersonByEmail(db: DbOrTx, email: string): Promise<PersonForSignIn | null> {
  const rows = await db
    .select({ id: person.id, passwordHash: person.passwordHash, endsAt: person.endsAt })
    .from(person)
    .where(eq(person.email, email.trim()))
  return rows[0] ?? null
}

/** Stores a person's own display settings. */
export async function updatePreferences(
  db: DbOrTx,
  personId: number,
  preferences: { pressureUnit?: string; theme?: string },
): Promise<void> {
  await db.update(person).set(preferences).where(eq(person.id, personId))
}

export interface PersonRow {
  id: number
  name: string
  email: string | null
  note: string
  endsAt: Date | null
  createdAt: Date
  /** Without a password nobody signs in: people who are only named on records. */
  signsIn: boolean
}

const personColumns = {
  id: person.id,
  name: person.name,
  email: person.email,
  note: person.note,
  endsAt: person.endsAt,
  createdAt: person.createdAt,
  passwordHash: person.passwordHash,
}

function toPerson({
  passwordHash,
  ...row
}: Omit<PersonRow, 'signsIn'> & { passwordHash: string | null }): PersonRow {
  return { ...row, signsIn: passwordHash !== null }
}

/** Everybody, by name. */
export async function listPeople(db: DbOrTx): Promise<PersonRow[]> {
  return (await db.select(personColumns).from(person).orderBy(asc(person.name))).map(toPerson)
}

/** One person, or null. */
export async function findPerson(db: DbOrTx, personId: number): Promise<PersonRow | null> {
  const [row] = await db.select(personColumns).from(person).where(eq(person.id, personId))
  return row === undefined ? null : toPerson(row)
}

/** Locks every account's row, in one order: what is decided about one may rest on the others. */
export async function lockPeople(tx: DbOrTx): Promise<void> {
  await tx.select({ id: person.id }).from(person).orderBy(asc(person.id)).for('update')
}

export async function insertPerson(tx: DbOrTx, row: typeof person.$inferInsert): Promise<number> {
  const [result] = await tx.insert(person).values(row)
  return result.insertId
}

/** Sets or lifts the end of an account. */
export async function updatePersonEnd(tx: DbOrTx, personId: number, endsAt: Date | null): Promise<void> {
  await tx.update(person).set({ endsAt }).where(eq(person.id, personId))
}

/** Signs a person out everywhere. */
export async function deleteSessionsOf(tx: DbOrTx, personId: number): Promise<void> {
  await tx.delete(session).where(eq(session.personId, personId))
}

export interface GrantRow {
  id: number
  personId: number
  person: string
  role: Role
  startsAt: Date
  endsAt: Date | null
  grantedById: number | null
  grantedBy: string | null
  grantedAt: Date
  reason: string
  confirmedBy: string | null
  confirmedAt: Date | null
  revokedById: number | null
  revokedBy: string | null
  revokedAt: Date | null
  revokeReason: string | null
}

/** Grants, newest first: of one person, or one of them, or those that wait for a second person. */
export async function listGrantRows(
  db: DbOrTx,
  filter: { personId?: number; grantId?: number; held?: boolean } = {},
): Promise<GrantRow[]> {
  const granter = aliasedTable(person, 'granter')
  const confirmer = aliasedTable(person, 'confirmer')
  const revoker = aliasedTable(person, 'revoker')
  return db
    .select({
      id: roleGrant.id,
      personId: roleGrant.personId,
      person: person.name,
      role: roleGrant.role,
      startsAt: roleGrant.startsAt,
      endsAt: roleGrant.endsAt,
      grantedById: roleGrant.grantedBy,
      grantedBy: granter.name,
      grantedAt: roleGrant.grantedAt,
      reason: roleGrant.reason,
      confirmedBy: confirmer.name,
      confirmedAt: roleGrant.confirmedAt,
      revokedById: roleGrant.revokedBy,
      revokedBy: revoker.name,
      revokedAt: roleGrant.revokedAt,
      revokeReason: roleGrant.revokeReason,
    })
    .from(roleGrant)
    .innerJoin(person, eq(person.id, roleGrant.personId))
    .leftJoin(granter, eq(granter.id, roleGrant.grantedBy))
    .leftJoin(confirmer, eq(confirmer.id, roleGrant.confirmedBy))
    .leftJoin(revoker, eq(revoker.id, roleGrant.revokedBy))
    .where(
      and(
        filter.personId === undefined ? undefined : eq(roleGrant.personId, filter.personId),
        filter.grantId === undefined ? undefined : eq(roleGrant.id, filter.grantId),
        filter.held
          ? and(isNull(roleGrant.confirmedAt), isNull(roleGrant.revokedBy), isNotNull(roleGrant.revokedAt))
          : undefined,
      ),
    )
    .orderBy(desc(roleGrant.grantedAt), desc(roleGrant.id))
}

export async function insertGrant(tx: DbOrTx, row: typeof roleGrant.$inferInsert): Promise<number> {
  const [result] = await tx.insert(roleGrant).values(row)
  return result.insertId
}

export async function updateGrant(
  tx: DbOrTx,
  grantId: number,
  changes: Partial<Omit<typeof roleGrant.$inferInsert, 'id' | 'personId' | 'role'>>,
): Promise<void> {
  await tx.update(roleGrant).set(changes).where(eq(roleGrant.id, grantId))
}

/** Kinds of thing that the record speaks of, by name. */
export async function listRecordedKinds(db: DbOrTx): Promise<string[]> {
  const rows = await db
    .selectDistinct({ kind: record.subjectKind })
    .from(record)
    .orderBy(asc(record.subjectKind))
  return rows.map(({ kind }) => kind)
}
