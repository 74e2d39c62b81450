/** The isolation list of a permit for paper. */
import type { DbOrTx } from '../db/client.server.ts'
import { listPointRows, type PointRow } from '../db/queries/isolation-points.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import type { PaperPoint } from '../domain/permit-sheets.ts'

/**
 * Every point that the permit asks for with the lock that hangs there, and every lock that hangs at a point which it no
 * longer asks for.
 */
export async function readPaperPoints(db: DbOrTx, { id, content }: PermitRow): Promise<PaperPoint[]> {
  const hanging = (await listPointRows(db, id)).filter(({ removedAt }) => removedAt === null)
  const asked = content.points.map(({ tag, isolates, required }) => {
    const own = hanging.filter((row) => row.tag === tag)
    return paperPoint(
      { tag, isolates, required },
      own.find(({ verifiedAt }) => verifiedAt !== null) ?? own[0],
    )
  })
  const listed = new Set(content.points.map(({ tag }) => tag))
  const others = hanging.filter(({ tag }) => !listed.has(tag)).map((row) => paperPoint(row, row))
  return [...asked, ...others]
}

function paperPoint(
  { tag, isolates, required }: Pick<PaperPoint, 'tag' | 'isolates' | 'required'>,
  row: PointRow | undefined,
): PaperPoint {
  const point = { tag, isolates, required }
  if (row === undefined) return { ...point, lock: null, verified: null }
  return {
    ...point,
    lock: {
      number: row.lockNumber,
      tagNumber: row.tagNumber,
      appliedBy: through(row.appliedByName, row.appliedWitnessName),
      appliedAt: row.appliedAt,
    },
    verified:
      row.verifiedAt === null || row.verifiedByName === null
        ? null
        : { by: through(row.verifiedByName, row.verifiedWitnessName), at: row.verifiedAt },
  }
}

/** Who has no sign-in acts through a witness, and paper says so. */
function through(name: string, witness: string | null): string {
  return witness === null ? name : `${name}, witnessed by ${witness}`
}
