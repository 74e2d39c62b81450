/**
 * Files that had been taken in before the demo begins: read by the product's own reader, so that what the database
 * holds is what the bytes say.
 */
import { createHash } from 'node:crypto'
import type mysql from 'mysql2'
import type { DbOrTx } from '../../app/db/client.server.ts'
import { attachment, attachmentChunk, importFile, importRange } from '../../app/db/schema/index.ts'
import { readNightFile } from '../../app/domain/night-files/reader.ts'
import type { Answer, ReadContext, ReadOut } from '../../app/domain/night-files/types.ts'
import { MARKS, qualityWord } from '../../app/domain/readings.ts'
import type { SourceProfile } from '../../app/domain/schemas/source-profile.ts'
import { DEMO_ZONE } from '../demo-time.ts'
import { nameOf } from '../people.ts'
import { CHANNELS, channelId, SOURCE_ID, SOURCES } from '../register/sources.ts'
import type { LoggerFile } from './files.ts'
import { loadReadings, type StoredReading } from './load.ts'
import { type TakenInFile, takenInFiles } from './taken-in.ts'

const CHUNK_BYTES = 1024 * 1024

interface TakenIn extends Omit<TakenInFile, 'make' | 'answer' | 'periodSeconds'> {
  id: number
  file: Omit<LoggerFile, 'readings'>
  readOut: ReadOut
  readingCount: number
  conflictCount: number
}

const CHANNELS_OF = Object.fromEntries(
  SOURCES.map(({ code }) => [
    code,
    CHANNELS.filter(({ source }) => source === code).map(({ name, position }) => ({
      name,
      quantity: position.quantity,
    })),
  ]),
)

/** Context in which a file of a source was read when it came in. */
function contextOf(file: Omit<LoggerFile, 'readings'>, takenInAt: Date): ReadContext {
  return {
    nowMs: takenInAt.getTime(),
    siteZone: DEMO_ZONE,
    channels: CHANNELS_OF[file.source] ?? [],
    fileName: file.fileName,
    statedBytes: file.bytes.length,
  }
}

/** The answer to a question that a file raises, with the question as the reader puts it. */
async function answered(
  file: Omit<LoggerFile, 'readings'>,
  { answer, takenInAt, takenInBy }: Omit<TakenInFile, 'make'>,
  profile: SourceProfile | null,
): Promise<Answer[]> {
  if (answer === undefined) return []
  const { questions } = await readNightFile([file.bytes], profile, contextOf(file, takenInAt), () => {})
  const asked = questions.find(({ id }) => id === answer.id)
  if (asked === undefined) throw new Error(`${file.fileName} raises no question "${answer.id}"`)
  const { text, found } = asked
  return [{ ...answer, text, found, by: nameOf(takenInBy), at: takenInAt.toISOString() }]
}

async function read(
  file: Omit<LoggerFile, 'readings'>,
  id: number,
  taking: Omit<TakenInFile, 'make'>,
): Promise<{ readOut: ReadOut; readings: StoredReading[] }> {
  const now = SOURCES.find(({ code }) => code === file.source)?.profile ?? null
  const { periodSeconds } = taking
  const profile =
    now === null || periodSeconds === undefined ? now : { ...now, expectedPeriodSeconds: periodSeconds }
  const answers = await answered(file, taking, profile)
  const readings: StoredReading[] = []
  const optional = (value: number) => (Number.isNaN(value) ? null : value)
  const readOut = await readNightFile(
    [file.bytes],
    profile,
    { ...contextOf(file, taking.takenInAt), answers },
    (batch, met) => {
      const ids = met.map(({ name }) => channelId(file.source, name))
      for (let index = 0; index < batch.count; index += 1) {
        readings.push({
          channelId: ids[batch.channel[index] as number] as number,
          atMs: batch.atMs[index] as number,
          seq: batch.seq[index] as number,
          value: optional(batch.value[index] as number),
          bound: optional(batch.bound[index] as number),
          quality: qualityWord(batch.quality[index] as number),
          marks: batch.marks[index] as number,
          importId: id,
          lineNo: batch.line[index] as number,
        })
      }
    },
  )
  if (readOut.state !== 'readable') {
    throw new Error(
      `The demo's ${file.fileName} was read as "${readOut.state}": ${readOut.refusal?.found ?? readOut.questions[0]?.text}`,
    )
  }
  return { readOut, readings }
}

/**
 * Reads every file and stores its readings; the next one is made while the database still takes in the one before.
 *
 * @returns what the imports' own rows are made from, and how many readings were new
 */
export async function loadArchive(pool: mysql.Pool): Promise<{ archive: TakenIn[]; stored: number }> {
  const archive: TakenIn[] = []
  let stored = 0
  let loading: Promise<number> = Promise.resolve(0)
  for (const [index, { make, ...taking }] of takenInFiles().entries()) {
    const { readings: _made, ...file } = make()
    const id = index + 1
    const { readOut, readings } = await read(file, id, taking)
    // In the order of the table's key, which the rows of a file are not in.
    readings.sort((a, b) => a.channelId - b.channelId || a.atMs - b.atMs || a.seq - b.seq)
    stored += await loading
    loading = loadReadings(pool, readings)
    archive.push({
      id,
      file,
      takenInAt: taking.takenInAt,
      takenInBy: taking.takenInBy,
      readOut,
      readingCount: readings.length,
      conflictCount: readings.filter(({ marks }) => (marks & MARKS.conflict) !== 0).length,
    })
  }
  stored += await loading
  return { archive, stored }
}

/** Writes the imports with their original bytes and the stretches they cover. */
export async function seedImports(db: DbOrTx, archive: readonly TakenIn[]): Promise<number> {
  for (const one of archive) await seedImport(db, one)
  return archive.length
}

async function seedImport(db: DbOrTx, one: TakenIn): Promise<void> {
  const { id, file, readOut, takenInAt, takenInBy } = one
  const sha256 = createHash('sha256').update(file.bytes).digest('hex')
  await db.insert(attachment).values({
    id,
    fileName: file.fileName,
    contentType: 'text/csv',
    byteSize: file.bytes.length,
    sha256,
    complete: true,
    subjectKind: 'import',
    subjectId: String(id),
    createdBy: takenInBy,
    createdAt: takenInAt,
  })
  const chunkCount = Math.ceil(file.bytes.length / CHUNK_BYTES)
  await db.insert(attachmentChunk).values(
    Array.from({ length: chunkCount }, (_, chunkNo) => ({
      attachmentId: id,
      chunkNo,
      data: file.bytes.subarray(chunkNo * CHUNK_BYTES, (chunkNo + 1) * CHUNK_BYTES),
    })),
  )
  await db.insert(importFile).values({
    id,
    state: 'accepted',
    sourceId: SOURCE_ID[file.source],
    fileName: file.fileName,
    byteSize: file.bytes.length,
    sha256,
    acceptedSha256: sha256,
    attachmentId: id,
    uploadedBy: takenInBy,
    uploadedAt: takenInAt,
    profileVersion: readOut.profileVersion,
    readOut,
    lineCount: readOut.lines.total,
    readingCount: one.readingCount,
    heldCount: 0,
    conflictCount: one.conflictCount,
    firstAt: readOut.firstMs === null ? null : new Date(readOut.firstMs),
    lastAt: readOut.lastMs === null ? null : new Date(readOut.lastMs),
    decidedBy: takenInBy,
    decidedAt: new Date(takenInAt.getTime() + 60_000),
    revision: 2,
  })
  const ranges = readOut.channels.flatMap(({ name, count, firstMs, lastMs }) =>
    firstMs === null || lastMs === null
      ? []
      : [
          {
            importId: id,
            channelId: channelId(file.source, name),
            firstAt: new Date(firstMs),
            lastAt: new Date(lastMs),
            readingCount: count,
          },
        ],
  )
  await db.insert(importRange).values(ranges)
}
