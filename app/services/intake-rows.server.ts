/** A kept file as rows for the database: read again from its bytes, which always gives the same readings. */

import { DomainError } from '../domain/errors.ts'
import { createNightFileReader } from '../domain/night-files/reader.ts'
import type { BatchChannel, ReadingBatch, ReadOut } from '../domain/night-files/types.ts'
import type { ReadingRules } from './intake-reading.server.ts'

/** Filled in while the rows are drawn. */
export interface ReadAgain {
  /** Rows handed over. */
  sent: number
  readOut: ReadOut | null
}

/** Tab-separated rows of (channel, at, seq, value, bound, quality, marks, line), a piece per batch. */
export async function* incomingRows(
  original: AsyncIterable<Uint8Array>,
  rules: ReadingRules,
  again: ReadAgain,
): AsyncGenerator<Buffer> {
  const ids = new Map(rules.channels.map(({ id, name }) => [name, id]))
  let waiting: ReadingBatch[] = []
  const reader = createNightFileReader(rules.profile, rules.context, (batch) => {
    waiting.push(batch)
  })
  const channelIds = () => reader.channels.map(({ name }) => idOf(ids, name))
  for await (const piece of original) {
    reader.push(piece)
    for (const batch of waiting) yield toRows(batch, channelIds())
    again.sent += waiting.reduce((sum, { count }) => sum + count, 0)
    waiting = []
  }
  again.readOut = reader.end()
  for (const batch of waiting) yield toRows(batch, channelIds())
  again.sent += waiting.reduce((sum, { count }) => sum + count, 0)
}

/** The same rows from readings that are at hand as a whole. */
export async function* batchRows(
  batches: readonly ReadingBatch[],
  channels: readonly BatchChannel[],
  ids: ReadonlyMap<string, number>,
): AsyncGenerator<Buffer> {
  const channelIds = channels.map(({ name }) => idOf(ids, name))
  for (const batch of batches) yield toRows(batch, channelIds)
}

function idOf(ids: ReadonlyMap<string, number>, name: string): number {
  const id = ids.get(name)
  if (id !== undefined) return id
  throw new DomainError(
    'conflict',
    `The register no longer has the channel ${name} of this source. Read the file again.`,
  )
}

function toRows(batch: ReadingBatch, channelIds: readonly number[]): Buffer {
  const lines: string[] = []
  // The channels of a line share its instant, whose text is dear.
  let atMs = Number.NaN
  let at = ''
  for (let i = 0; i < batch.count; i += 1) {
    if (batch.atMs[i] !== atMs) {
      atMs = batch.atMs[i] as number
      at = new Date(atMs).toISOString().replace('T', ' ').slice(0, 23)
    }
    lines.push(
      `${channelIds[batch.channel[i] as number]}\t${at}\t${batch.seq[i]}\t${orNull(batch.value[i])}\t${orNull(batch.bound[i])}\t${batch.quality[i]}\t${batch.marks[i]}\t${batch.line[i]}\n`,
    )
  }
  return Buffer.from(lines.join(''), 'ascii')
}

function orNull(value: number | undefined): string {
  // A double's shortest decimal form comes back as the same double.
  return value === undefined || Number.isNaN(value) ? '\\N' : String(value)
}
