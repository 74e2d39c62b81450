/**
 * Night files that had been taken in before the demo begins: read by the product's own reader, so that what the
 * database holds is what the bytes say. The west logger's last file is left for a person to take in.
 */
import { createHash } from 'node:crypto'
import { TZDate } from '@date-fns/tz'
import { addDays, addMinutes } from 'date-fns'
import type { DbOrTx } from '../../app/db/client.server.ts'
import { attachment, attachmentChunk, importFile, importRange } from '../../app/db/schema/index.ts'
import { readNightFile } from '../../app/domain/night-files/reader.ts'
import type { ReadOut } from '../../app/domain/night-files/types.ts'
import { MARKS, qualityWord } from '../../app/domain/readings.ts'
import { at, DEMO_ZONE } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import { CHANNELS, channelId, SOURCE_ID, SOURCES } from '../register/sources.ts'
import type { StoredReading } from './load.ts'
import { demoNights, type NightFile, nightFile } from './night-file.ts'

const CHUNK_BYTES = 1024 * 1024

interface TakenIn {
  id: number
  file: NightFile
  readOut: ReadOut
  readings: StoredReading[]
}

/** Mornings on which the crews took the files in: the two of them by turns. */
function takenInBy(index: number): { person: number; minutesAfterSix: number } {
  const people = [PERSON_ID.pim, PERSON_ID.odalys, PERSON_ID.corwin, PERSON_ID.nerys]
  return { person: people[index % people.length] as number, minutesAfterSix: 35 + ((index * 7) % 20) }
}

function takenInAt(file: NightFile, index: number): Date {
  const morning = addDays(new TZDate(at(`${file.night} 06:00`).getTime(), DEMO_ZONE), 1)
  return new Date(addMinutes(morning, takenInBy(index).minutesAfterSix).getTime())
}

async function takeIn(file: NightFile, id: number, nowMs: number): Promise<TakenIn> {
  const profile = SOURCES.find(({ code }) => code === file.source)?.profile ?? null
  const channels = CHANNELS.filter(({ source }) => source === file.source).map(({ name, position }) => ({
    name,
    quantity: position.quantity,
  }))
  const readings: StoredReading[] = []
  const readOut = await readNightFile(
    [file.bytes],
    profile,
    { nowMs, siteZone: DEMO_ZONE, channels, fileName: file.fileName, statedBytes: file.bytes.length },
    (batch, met) => {
      const ids = met.map(({ name }) => channelId(file.source, name))
      const optional = (value: number) => (Number.isNaN(value) ? null : value)
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
  return { id, file, readOut, readings }
}

/** Reads all files of the demo but the west logger's last. */
export async function readArchive(): Promise<TakenIn[]> {
  const nights = demoNights()
  const files = nights.flatMap((night, index) => {
    const east = nightFile('NL-E', night)
    return index === nights.length - 1 ? [east] : [nightFile('NL-W', night), east]
  })
  const taken: TakenIn[] = []
  for (const [index, file] of files.entries()) {
    taken.push(await takeIn(file, index + 1, takenInAt(file, index).getTime()))
  }
  return taken
}

/** Writes the imports with their original bytes and the stretches they cover. */
export async function seedImports(db: DbOrTx, archive: readonly TakenIn[]): Promise<number> {
  for (const [index, { id, file, readOut, readings }] of archive.entries()) {
    const sha256 = createHash('sha256').update(file.bytes).digest('hex')
    const decidedAt = takenInAt(file, index)
    const { person } = takenInBy(index)
    await db.insert(attachment).values({
      id,
      fileName: file.fileName,
      contentType: 'text/csv',
      byteSize: file.bytes.length,
      sha256,
      complete: true,
      subjectKind: 'import',
      subjectId: String(id),
      createdBy: person,
      createdAt: decidedAt,
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
      uploadedBy: person,
      uploadedAt: decidedAt,
      profileVersion: readOut.profileVersion,
      readOut,
      lineCount: readOut.lines.total,
      readingCount: readings.length,
      heldCount: 0,
      conflictCount: readings.filter(({ marks }) => (marks & MARKS.conflict) !== 0).length,
      firstAt: readOut.firstMs === null ? null : new Date(readOut.firstMs),
      lastAt: readOut.lastMs === null ? null : new Date(readOut.lastMs),
      decidedBy: person,
      decidedAt: new Date(decidedAt.getTime() + 60_000),
      revision: 2,
    })
    await db.insert(importRange).values(
      readOut.channels.flatMap(({ name, count, firstMs, lastMs }) =>
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
      ),
    )
  }
  return archive.length
}
