/** The log of the demo: everything that was written down, each entry with its signature. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { logAmendment, logEntry, signedAct } from '../../app/db/schema/index.ts'
import { ENTRY_KIND_FACTS } from '../../app/domain/logbook.ts'
import { at } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import { segmentOf } from '../register/segments.ts'
import { bakeEntries } from './bake-entries.ts'
import type { DemoEntry } from './entry.ts'
import { eventEntries, monthlyTries } from './event-entries.ts'
import { LAST_WEEKS } from './last-weeks.ts'
import { dailyEntries } from './rounds.ts'

/** Rows of one insert. */
const BLOCK = 200

/** All entries, in the order in which they were written. */
function logEntries(): DemoEntry[] {
  return [
    ...eventEntries(),
    ...bakeEntries(),
    ...monthlyTries(at('2025-10-01 12:00'), 12),
    ...dailyEntries(),
    ...LAST_WEEKS,
  ].sort((a, b) => a.writtenAt.getTime() - b.writtenAt.getTime())
}

async function inBlocks<T>(rows: readonly T[], insert: (block: T[]) => Promise<unknown>): Promise<void> {
  for (let from = 0; from < rows.length; from += BLOCK) await insert(rows.slice(from, from + BLOCK))
}

/** Writes them. The log is empty before, so the ids run from 1. */
export async function seedLogEntries(db: DbOrTx): Promise<number> {
  const entries = logEntries()
  const signature = (id: number, by: DemoEntry['by'], when: Date, meaning: string, subjectId: string) => ({
    id,
    personId: PERSON_ID[by],
    at: when,
    machineAt: when,
    usedAt: when,
    meaning,
    subjectKind: 'log-entry',
    subjectId,
  })
  const signatures = entries.map(({ by, writtenAt }, index) =>
    signature(index + 1, by, writtenAt, 'write a log entry', 'new'),
  )
  const amended = entries.flatMap(({ by, amended: change }, index) =>
    change === undefined ? [] : [{ entryId: index + 1, by, change }],
  )
  const amendments = amended.map(({ entryId, by, change }, index) => {
    const signedActId = entries.length + index + 1
    signatures.push(signature(signedActId, by, change.writtenAt, 'amend a log entry', String(entryId)))
    return { entryId, authorId: PERSON_ID[by], signedActId, ...change }
  })
  await inBlocks(signatures, (block) => db.insert(signedAct).values(block))
  const rows = entries.map(({ segment, kind, eventAt, writtenAt, text, by }, index) => ({
    id: index + 1,
    segmentId: segment === null ? null : segmentOf(segment).id,
    kind,
    eventAt,
    writtenAt,
    text,
    authorId: PERSON_ID[by],
    onChart: ENTRY_KIND_FACTS[kind].onChart,
    signedActId: index + 1,
  }))
  await inBlocks(rows, (block) => db.insert(logEntry).values(block))
  await inBlocks(amendments, (block) => db.insert(logAmendment).values(block))
  return entries.length
}
