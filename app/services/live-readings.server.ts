/**
 * Live readings that a logger posts. They are stored as those of an accepted file are: an import with the post's bytes
 * as its original, readings that lead back to their place in it, duplicates left out and differing ones marked. Nobody
 * has to accept them, since the source was settled when its token was made; and as nobody acts, the record of who did
 * what has no line for them: the import and the post's own row say all there is.
 */
import { createHash } from 'node:crypto'
import type { Db, DbOrTx } from '../db/client.server.ts'
import { isDuplicate } from '../db/errors.server.ts'
import {
  findPost,
  finishPost,
  insertPost,
  type PostRow,
  type TokenRow,
  updateToken,
} from '../db/queries/api.server.ts'
import {
  beginOriginal,
  findSource,
  finishOriginal,
  insertImport,
  lockSource,
  type SourceRow,
  updateImport,
  writeOriginalChunk,
} from '../db/queries/imports.server.ts'
import {
  createIncoming,
  loadIncoming,
  mergeIncoming,
  onOneConnection,
} from '../db/queries/imports-merge.server.ts'
import { importStretches } from '../db/queries/imports-withdraw.server.ts'
import { listSourceEnds } from '../db/queries/readings.server.ts'
import { tx } from '../db/transaction.server.ts'
import { DomainError } from '../domain/errors.ts'
import { type ReadPost, readPost } from '../domain/live-readings.ts'
import type { KnownChannel } from '../domain/night-files/types.ts'
import type { Quantity } from '../domain/readings.ts'
import type { PostAnswer } from '../domain/schemas/api-answers.ts'
import { type PostFault, parsePost } from '../domain/schemas/live-readings.ts'
import { type ReadingRules, readingRules } from './intake-reading.server.ts'
import { batchRows } from './intake-rows.server.ts'
import { markOutOfDate } from './revisions.server.ts'

const PIECE_BYTES = 1024 * 1024
/** The note of a token's last use need not be finer. */
const USE_NOTED_EVERY_MS = 60_000

export interface LivePost {
  sourceCode: string
  /** Header Idempotency-Key. */
  requestKey: string
  /** The body as it came. */
  bytes: Uint8Array
}

export interface TakenPost {
  answer: PostAnswer
  /** The same post had been taken before; nothing was added. */
  again: boolean
}

/** What was wrong with a post, by reading and field. */
export class PostRefused extends DomainError {
  readonly faults: readonly PostFault[]
  readonly total: number

  constructor(faults: readonly PostFault[], total: number) {
    super(
      'not-acceptable-now',
      `${total === 1 ? 'One thing is' : `${total} things are`} wrong with this post; nothing of it was stored.`,
    )
    this.faults = faults
    this.total = total
  }
}

/**
 * Takes a post in, all of it or nothing.
 *
 * @param token good for the source (`tokenFor`)
 * @throws DomainError bad-input (no JSON), not-found (no such source), not-acceptable-now (the key was used for another
 *   post); PostRefused with every fault
 */
export async function takeInPost(db: Db, token: TokenRow, now: Date, post: LivePost): Promise<TakenPost> {
  const bodySha256 = createHash('sha256').update(post.bytes).digest('hex')
  const source = await sourceOf(db, post.sourceCode)
  const before = await findPost(db, token.id, post.requestKey)
  if (before !== null) return sameAnswer(before, source, bodySha256)
  const parsed = parsePost(parseJson(post.bytes))
  if (!parsed.ok) throw new PostRefused(parsed.faults, parsed.total)
  try {
    const taken: TakenPost = await onOneConnection(db, ({ db: one, raw }) =>
      tx(one, async (inside) => {
        // Posts and files of one source come in one after the other: two may hold the same instants.
        const locked = await lockSource(inside, source.id)
        if (locked === null) throw noSource(post.sourceCode)
        // Before anything is read: a second request with this key ends here, and is told what the first one was.
        const postId = await insertPost(inside, {
          tokenId: token.id,
          requestKey: post.requestKey,
          sourceId: source.id,
          bodySha256,
          receivedAt: now,
        })
        const fileName = `${source.code}_${now.toISOString()}.json`
        const rules = await readingRules(inside, locked, {
          uploadedAt: now,
          fileName,
          statedBytes: null,
          answers: [],
        })
        const read = readPost(
          parsed.readings,
          { channels: datedChannels(rules), profile: rules.profile, nowMs: now.getTime() },
          post.bytes.length,
        )
        if (!read.ok) throw new PostRefused(read.faults, read.total)
        const importId = await keepImport(inside, now, {
          source,
          fileName,
          bytes: post.bytes,
          sha256: bodySha256,
          read,
        })
        const ids = new Map(rules.channels.map(({ id, name }) => [name, id]))
        await createIncoming(inside)
        const { loaded, warnings } = await loadIncoming(raw, batchRows(read.batches, read.channels, ids))
        if (loaded !== read.readOut.readings.total || warnings > 0)
          throw new Error(
            `Import ${importId}: ${loaded} of ${read.readOut.readings.total} rows, ${warnings} warnings`,
          )
        const counts = await mergeIncoming(inside, importId)
        // What was held back and comes late did not stand in what was computed meanwhile.
        await markOutOfDate(inside, {
          stretches: await importStretches(inside, importId),
          now,
          reason: `Import ${importId} (posted by ${token.name}) brought readings for a time already computed.`,
        })
        const answer: PostAnswer = {
          importId,
          ...counts,
          flagged: read.readOut.lines.flagged,
          skipped: read.readOut.lines.skipped,
        }
        await settle(inside, postId, answer)
        return { answer, again: false }
      }),
    )
    await noteUse(db, token, now)
    return taken
  } catch (error) {
    if (!isDuplicate(error)) throw error
    const held = await findPost(db, token.id, post.requestKey)
    if (held === null) throw error
    return sameAnswer(held, source, bodySha256)
  }
}

/** Last instant that is stored of a source, by file or post; null when nothing is. */
export async function liveEnd(db: Db, sourceCode: string, now: Date): Promise<Date | null> {
  const ends = await listSourceEnds(db, now)
  return ends.find(({ code }) => code === sourceCode)?.endAt ?? null
}

async function sourceOf(db: Db, code: string): Promise<SourceRow> {
  const source = await findSource(db, code)
  if (source === null) throw noSource(code)
  return source
}

function noSource(code: string): DomainError {
  return new DomainError('not-found', `The register has no source ${code}.`)
}

function parseJson(bytes: Uint8Array): unknown {
  try {
    return JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(bytes))
  } catch (error) {
    const why = error instanceof SyntaxError ? error.message : 'it is not UTF-8 text'
    throw new DomainError(
      'bad-input',
      `The body was read as JSON and is none: ${why}. Send {"readings": [{"channel": …, "at": …, "value": …}]}.`,
      { cause: error },
    )
  }
}

function sameAnswer(held: PostRow, source: SourceRow, bodySha256: string): TakenPost {
  if (held.bodySha256 === bodySha256 && held.sourceId === source.id)
    return { answer: held.answer as unknown as PostAnswer, again: true }
  throw new DomainError(
    'not-acceptable-now',
    'This Idempotency-Key was used for another post before. Give every post a key of its own, and use it again only to repeat that post unchanged.',
  )
}

async function keepImport(
  inside: DbOrTx,
  now: Date,
  kept: {
    source: SourceRow
    fileName: string
    bytes: Uint8Array
    sha256: string
    read: Extract<ReadPost, { ok: true }>
  },
): Promise<number> {
  const { readOut } = kept.read
  const attachmentId = await beginOriginal(inside, {
    fileName: kept.fileName,
    createdBy: null,
    createdAt: now,
  })
  for (let from = 0, chunkNo = 0; from < kept.bytes.length; from += PIECE_BYTES, chunkNo += 1)
    await writeOriginalChunk(inside, attachmentId, chunkNo, kept.bytes.subarray(from, from + PIECE_BYTES))
  const importId = await insertImport(inside, {
    state: 'accepted',
    arrival: 'post',
    sourceId: kept.source.id,
    fileName: kept.fileName,
    byteSize: kept.bytes.length,
    sha256: kept.sha256,
    attachmentId,
    uploadedAt: now,
    profileVersion: readOut.profileVersion,
    readOut,
    lineCount: readOut.lines.total,
    firstAt: readOut.firstMs === null ? null : new Date(readOut.firstMs),
    lastAt: readOut.lastMs === null ? null : new Date(readOut.lastMs),
    decidedAt: now,
  })
  await finishOriginal(inside, attachmentId, {
    byteSize: kept.bytes.length,
    sha256: kept.sha256,
    subjectId: String(importId),
  })
  return importId
}

/** Channels with their dates, and a quantity for each. */
function datedChannels({ channels }: ReadingRules): (KnownChannel & { quantity: Quantity })[] {
  return channels.map(({ name, quantity, ignored, fromAt, untilAt }) => ({
    name,
    quantity,
    ignored,
    fromMs: fromAt?.getTime() ?? null,
    untilMs: untilAt?.getTime() ?? null,
  }))
}

async function settle(inside: DbOrTx, postId: number, answer: PostAnswer): Promise<void> {
  await updateImport(inside, answer.importId, {
    readingCount: answer.stored,
    heldCount: answer.held,
    conflictCount: answer.conflicting,
  })
  await finishPost(inside, postId, { importId: answer.importId, answer: { ...answer } })
}

/** Outside the transaction: two posts of one token must not wait for each other over a note. */
async function noteUse(db: Db, token: TokenRow, now: Date): Promise<void> {
  const noted = token.lastUsedAt?.getTime() ?? Number.NEGATIVE_INFINITY
  if (now.getTime() - noted >= USE_NOTED_EVERY_MS) await updateToken(db, token.id, { lastUsedAt: now })
}
