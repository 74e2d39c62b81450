/** Whether a file that waits is a copy of readings that are held already, with fewer digits. */
import type { Db } from '../db/client.server.ts'
import { findImport, findSource, readOriginal } from '../db/queries/imports.server.ts'
import { listStoredReadings } from '../db/queries/readings.server.ts'
import { DomainError } from '../domain/errors.ts'
import { copyTrials, type Trial } from '../domain/night-files/copy-trials.ts'
import { readNightFile } from '../domain/night-files/reader.ts'
import { type CopyFinding, compareWithStored, type StoredPair } from '../domain/night-files/rounded-copy.ts'
import { isUsable, qualityWord } from '../domain/readings.ts'
import { type ReadingRules, readingRules, storedReport } from './intake-reading.server.ts'

/** Channels and readings of each that are looked at; a copy shows itself long before. */
const MOST_CHANNELS = 12
const MOST_READINGS = 1500

/** Values of a file by channel and instant. */
type Values = Map<string, Map<number, number>>

/**
 * Compares a waiting or refused file with the stored readings of the same channels and instants. A file that lost its
 * unit or whose dates are in doubt is read in every way that it allows; what fits the stored readings decides.
 *
 * @returns the finding when the file is a rounded copy, else null
 * @throws DomainError not-found, when there is no such import
 */
export async function findRoundedCopy(db: Db, importId: number): Promise<CopyFinding | null> {
  const found = Number.isSafeInteger(importId) ? await findImport(db, importId) : null
  if (found === null)
    throw new DomainError('not-found', 'There is no file with this number in the log intake.')
  const report = storedReport(found.readOut)
  if (report === null || (found.state !== 'read' && found.state !== 'refused')) return null
  const source = await findSource(db, found.sourceCode)
  if (source === null) return null
  const rules = await readingRules(db, source, {
    uploadedAt: found.uploadedAt,
    fileName: found.fileName,
    statedBytes: null,
    answers: report.answers,
  })
  for (const trial of copyTrials(rules.profile, report)) {
    const values = await valuesOf(readOriginal(db, found.attachmentId), trial, rules)
    const finding = compareWithStored(await pairsWithStored(db, rules, values))
    if (finding.kind === 'rounded-copy') return finding
  }
  return null
}

async function valuesOf(
  original: AsyncIterable<Uint8Array>,
  { profile, answers }: Trial,
  { context }: ReadingRules,
): Promise<Values> {
  const values: Values = new Map()
  await readNightFile(original, profile, { ...context, answers }, (batch, channels) => {
    for (let i = 0; i < batch.count; i += 1) {
      if (!isUsable(qualityWord(batch.quality[i] as number), batch.marks[i] as number)) continue
      const name = channels[batch.channel[i] as number]?.name ?? ''
      let own = values.get(name)
      if (own === undefined) {
        if (values.size >= MOST_CHANNELS) continue
        own = new Map()
        values.set(name, own)
      }
      if (own.size < MOST_READINGS) own.set(batch.atMs[i] as number, batch.value[i] as number)
    }
  })
  return values
}

async function pairsWithStored(db: Db, { channels }: ReadingRules, values: Values): Promise<StoredPair[]> {
  const pairs: StoredPair[] = []
  for (const { id, name, quantity } of channels) {
    const own = values.get(name)
    if (own === undefined) continue
    const times = Array.from(own.keys())
    const stored = await listStoredReadings(db, {
      channelId: id,
      from: new Date(Math.min(...times)),
      to: new Date(Math.max(...times) + 1),
      limit: 2 * MOST_READINGS,
    })
    for (const { at, value, quality, marks } of stored) {
      const inFile = own.get(at.getTime())
      if (inFile === undefined || value === null || !isUsable(quality, marks)) continue
      pairs.push({ channel: name, quantity, atMs: at.getTime(), inFile, stored: value })
    }
  }
  return pairs
}
