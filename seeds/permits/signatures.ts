/**
 * Signatures of the demo's permits. They are invented like everything else in the demo: nobody has given a password for
 * them, the rows only stand where a real signature would.
 */
import type { signedAct } from '../../app/db/schema/index.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'

type Row = typeof signedAct.$inferInsert & { id: number }

export interface Signatures {
  rows: Row[]
  /** Adds a signature. @returns its id */
  sign: (by: PersonKey, when: Date, meaning: string, subject: { kind: string; id: string }) => number
}

/** @param lastId the highest id that is taken */
export function signaturesAfter(lastId: number): Signatures {
  const rows: Row[] = []
  return {
    rows,
    sign: (by, when, meaning, { kind, id: subjectId }) => {
      const id = lastId + rows.length + 1
      rows.push({
        id,
        personId: PERSON_ID[by],
        meaning,
        subjectKind: kind,
        subjectId,
        at: when,
        machineAt: when,
        usedAt: when,
      })
      return id
    },
  }
}
