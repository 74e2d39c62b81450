/** Tokens for machines that send readings: made and revoked by an administrator, shown once, kept as a hash. */
import { createHash, randomBytes } from 'node:crypto'
import type { Db } from '../db/client.server.ts'
import { isDuplicate } from '../db/errors.server.ts'
import {
  findTokenByHash,
  insertToken,
  listTokens,
  lockToken,
  type TokenRow,
  updateToken,
} from '../db/queries/api.server.ts'
import { listSources } from '../db/queries/imports.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { NewTokenForm } from '../domain/schemas/api-token.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'

/** Makes a token recognisable in a log or a file that it should not be in. */
const PREFIX = 'ebb_'
const MOST_DAYS = 731
const DAY_MS = 86_400_000

export type TokenStanding = 'in-force' | 'ended' | 'revoked'

export interface TokenWithStanding extends TokenRow {
  standing: TokenStanding
}

/** Whether a token is good at an instant. */
function tokenStanding(token: Pick<TokenRow, 'endsAt' | 'revokedAt'>, at: Date): TokenStanding {
  if (token.revokedAt !== null) return 'revoked'
  return token.endsAt <= at ? 'ended' : 'in-force'
}

function hashToken(token: string): string {
  return createHash('sha256').update(token).digest('hex')
}

export interface TokensPageData {
  tokens: TokenWithStanding[]
  sources: { code: string; name: string }[]
}

/** Every token with how it stands, and the sources that one may be made for. */
export async function readTokens(db: Db, actor: Actor, now: Date): Promise<TokensPageData> {
  demand(actor, 'people:view')
  const [tokens, sources] = await Promise.all([listTokens(db), listSources(db)])
  return {
    tokens: tokens.map((token) => ({ ...token, standing: tokenStanding(token, now) })),
    sources: sources.map(({ code, name }) => ({ code, name })),
  }
}

/**
 * Makes a token.
 *
 * @returns the token, which is nowhere to be read again
 * @throws DomainError forbidden, bad-input (day over or too far, no such source)
 */
export async function addToken(db: Db, actor: Actor, now: Date, form: NewTokenForm): Promise<string> {
  demand(actor, 'people:edit')
  if (form.until <= now) throw fieldFault({ until: 'This day is over. Give a day to come.' })
  if (form.until.getTime() > now.getTime() + MOST_DAYS * DAY_MS)
    throw fieldFault({ until: 'At most two years ahead. Make a new token when this one ends.' })
  const token = `${PREFIX}${randomBytes(32).toString('base64url')}`
  await tx(db, async (inside) => {
    const sources = await listSources(inside)
    const chosen = form.sources.map((code) => {
      const found = sources.find((source) => source.code === code)
      if (found === undefined)
        throw fieldFault({ sources: `The register has no source ${code} in use. Choose from the list.` })
      return found
    })
    const tokenId = await insertToken(
      inside,
      {
        name: form.name,
        tokenHash: hashToken(token),
        createdBy: actor.personId,
        createdAt: now,
        endsAt: form.until,
      },
      chosen.map(({ id }) => id),
    )
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'API token made',
      subjectKind: 'api-token',
      subjectId: String(tokenId),
      after: { name: form.name, sources: form.sources, until: form.until },
      reason: form.reason,
    })
  })
  return token
}

/**
 * Revokes a token: it is refused from the next request on.
 *
 * @returns the token's name
 * @throws DomainError forbidden, not-found, conflict (revoked already)
 */
export async function revokeToken(
  db: Db,
  actor: Actor,
  now: Date,
  revoked: { tokenId: number; reason: string },
): Promise<string> {
  demand(actor, 'people:edit')
  return tx(db, async (inside) => {
    const found = await lockToken(inside, revoked.tokenId)
    if (found === null)
      throw new DomainError('not-found', 'There is no such token. The list shows those there are.')
    if (found.revokedAt !== null)
      throw new DomainError('conflict', `“${found.name}” has been revoked already. Nothing was changed.`)
    await updateToken(inside, revoked.tokenId, {
      revokedBy: actor.personId,
      revokedAt: now,
      revokeReason: revoked.reason,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'API token revoked',
      subjectKind: 'api-token',
      subjectId: String(revoked.tokenId),
      after: { name: found.name },
      reason: revoked.reason,
    })
    return found.name
  })
}

/**
 * The token that a request carries in its Authorization header, if it is good for a source.
 *
 * @throws DomainError not-signed-in (none, unknown, ended, revoked), forbidden (made for other sources)
 */
export async function tokenFor(
  db: Db,
  authorization: string | null,
  sourceCode: string,
  now: Date,
): Promise<TokenRow> {
  const given = /^Bearer +([A-Za-z0-9._~+/=-]{1,200}) *$/i.exec(authorization ?? '')?.[1]
  if (given === undefined) {
    throw new DomainError(
      'not-signed-in',
      'This address needs a header “Authorization: Bearer …” with a token that an administrator made under People, Tokens.',
    )
  }
  const token = await findTokenByHash(db, hashToken(given))
  if (token === null)
    throw new DomainError('not-signed-in', 'This token is not known here. Ask an administrator for one.')
  const standing = tokenStanding(token, now)
  if (standing !== 'in-force') {
    throw new DomainError(
      'not-signed-in',
      `The token “${token.name}” ${standing === 'revoked' ? 'has been revoked' : 'has ended'}. Ask an administrator for a new one.`,
    )
  }
  if (!token.sources.includes(sourceCode)) {
    throw new DomainError(
      'forbidden',
      `The token “${token.name}” may send for ${token.sources.join(', ')} and not for ${sourceCode}. Use the token of that source.`,
    )
  }
  return token
}

/**
 * Makes the demo's own token known, once: the demo makes it at its start and its feeder sends with it. One that has been
 * revoked stays so.
 *
 * @param token at least 32 characters
 */
export async function ensureDemoToken(
  db: Db,
  now: Date,
  demo: { token: string; name: string; sources: readonly string[]; endsAt: Date },
): Promise<void> {
  const tokenHash = hashToken(demo.token)
  if ((await findTokenByHash(db, tokenHash)) !== null) return
  try {
    await addDemoToken(db, now, tokenHash, demo)
  } catch (error) {
    // Another run was first; there is nothing left to do.
    if (!isDuplicate(error)) throw error
  }
}

type DemoToken = Omit<Parameters<typeof ensureDemoToken>[2], 'token'>

async function addDemoToken(db: Db, now: Date, tokenHash: string, demo: DemoToken): Promise<void> {
  await tx(db, async (inside) => {
    const known = await listSources(inside)
    const sourceIds = known.filter(({ code }) => demo.sources.includes(code)).map(({ id }) => id)
    if (sourceIds.length === 0) return
    const tokenId = await insertToken(
      inside,
      { name: demo.name, tokenHash, createdBy: null, createdAt: now, endsAt: demo.endsAt },
      sourceIds,
    )
    await writeRecord(inside, {
      at: now,
      actor: null,
      act: 'API token made',
      subjectKind: 'api-token',
      subjectId: String(tokenId),
      after: { name: demo.name, sources: demo.sources, until: demo.endsAt },
      reason: 'For the feeder of the demo',
    })
  })
}
