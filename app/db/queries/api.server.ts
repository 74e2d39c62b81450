/** Tokens of machines that send readings, and the posts taken in from them. */
import { aliasedTable, and, asc, desc, eq, inArray } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { apiPost, apiToken, apiTokenSource, person, source } from '../schema/index.ts'

export interface TokenRow {
  id: number
  name: string
  createdBy: string | null
  createdAt: Date
  endsAt: Date
  revokedBy: string | null
  revokedAt: Date | null
  revokeReason: string | null
  lastUsedAt: Date | null
  /** Codes of the sources it may send for. */
  sources: string[]
}

const revoker = aliasedTable(person, 'revoker')

function selectTokens(db: DbOrTx) {
  return db
    .select({
      id: apiToken.id,
      name: apiToken.name,
      createdBy: person.name,
      createdAt: apiToken.createdAt,
      endsAt: apiToken.endsAt,
      revokedBy: revoker.name,
      revokedAt: apiToken.revokedAt,
      revokeReason: apiToken.revokeReason,
      lastUsedAt: apiToken.lastUsedAt,
    })
    .from(apiToken)
    .leftJoin(person, eq(person.id, apiToken.createdBy))
    .leftJoin(revoker, eq(revoker.id, apiToken.revokedBy))
}

async function withSources(db: DbOrTx, rows: readonly Omit<TokenRow, 'sources'>[]): Promise<TokenRow[]> {
  if (rows.length === 0) return []
  const scopes = await db
    .select({ tokenId: apiTokenSource.tokenId, code: source.code })
    .from(apiTokenSource)
    .innerJoin(source, eq(source.id, apiTokenSource.sourceId))
    .where(
      inArray(
        apiTokenSource.tokenId,
        rows.map(({ id }) => id),
      ),
    )
    .orderBy(asc(source.code))
  return rows.map((row) => ({
    ...row,
    sources: scopes.filter(({ tokenId }) => tokenId === row.id).map(({ code }) => code),
  }))
}

/** Every token, the newest first. */
export async function listTokens(db: DbOrTx): Promise<TokenRow[]> {
  return withSources(db, await selectTokens(db).orderBy(desc(apiToken.id)))
}

/** The token with a hash; null when there is none. */
export async function findTokenByHash(db: DbOrTx, tokenHash: string): Promise<TokenRow | null> {
  const rows = await withSources(db, await selectTokens(db).where(eq(apiToken.tokenHash, tokenHash)))
  return rows[0] ?? null
}

/** Locks a token until the transaction ends. */
export async function lockToken(
  tx: DbOrTx,
  tokenId: number,
): Promise<{ name: string; revokedAt: Date | null } | null> {
  const [row] = await tx
    .select({ name: apiToken.name, revokedAt: apiToken.revokedAt })
    .from(apiToken)
    .where(eq(apiToken.id, tokenId))
    .for('update')
  return row ?? null
}

export async function insertToken(
  tx: DbOrTx,
  row: typeof apiToken.$inferInsert,
  sourceIds: readonly number[],
): Promise<number> {
  const [result] = await tx.insert(apiToken).values(row)
  const tokenId = result.insertId
  await tx.insert(apiTokenSource).values(sourceIds.map((sourceId) => ({ tokenId, sourceId })))
  return tokenId
}

export async function updateToken(
  tx: DbOrTx,
  tokenId: number,
  set: Partial<Omit<typeof apiToken.$inferInsert, 'id' | 'tokenHash'>>,
): Promise<void> {
  await tx.update(apiToken).set(set).where(eq(apiToken.id, tokenId))
}

export interface PostRow {
  bodySha256: string
  sourceId: number
  answer: Record<string, unknown>
}

/** The post that a token sent under a key; null when there is none. */
export async function findPost(db: DbOrTx, tokenId: number, requestKey: string): Promise<PostRow | null> {
  const [row] = await db
    .select({ bodySha256: apiPost.bodySha256, sourceId: apiPost.sourceId, answer: apiPost.answer })
    .from(apiPost)
    .where(and(eq(apiPost.tokenId, tokenId), eq(apiPost.requestKey, requestKey)))
  return row === undefined ? null : { ...row, answer: row.answer ?? {} }
}

/** Claims a key for a post. A second transaction with the same key waits here, and then fails as a duplicate. */
export async function insertPost(tx: DbOrTx, row: typeof apiPost.$inferInsert): Promise<number> {
  const [result] = await tx.insert(apiPost).values(row)
  return result.insertId
}

export async function finishPost(
  tx: DbOrTx,
  postId: number,
  set: { importId: number; answer: Record<string, unknown> },
): Promise<void> {
  await tx.update(apiPost).set(set).where(eq(apiPost.id, postId))
}
