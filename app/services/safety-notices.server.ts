/** Closed stretches and open dangers, for pages about the line or one segment of it. */
import type { DbOrTx } from '../db/client.server.ts'
import { findSegments } from '../db/queries/heating.server.ts'
import { type BayClosureRow, readClosedStretches } from './bay-closures.server.ts'
import { readAllDangers, readDangersAtSegments, type SafetyEventRow } from './safety-events.server.ts'

export interface SafetyNoticesData {
  closures: BayClosureRow[]
  /** The most serious first. */
  dangers: SafetyEventRow[]
}

/** Of the whole site, or of one segment; nothing for a segment that the register does not know. */
export async function readSafetyNotices(db: DbOrTx, tag?: string): Promise<SafetyNoticesData> {
  if (tag === undefined) {
    const [closures, dangers] = await Promise.all([readClosedStretches(db), readAllDangers(db)])
    return { closures, dangers: dangers.open }
  }
  const [segment] = await findSegments(db, [tag])
  if (segment === undefined) return { closures: [], dangers: [] }
  const stretch = { lineId: segment.lineId, fromM: segment.startM, toM: segment.endM }
  const [closures, dangers] = await Promise.all([
    readClosedStretches(db, stretch),
    readDangersAtSegments(db, [segment.id]),
  ])
  return { closures, dangers }
}
