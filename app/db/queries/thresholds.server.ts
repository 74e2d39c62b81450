/** Thresholds as the site has adopted them, and the heaters that cautions read. */
import { and, asc, desc, eq, inArray, isNull } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { DbOrTx } from '../client.server.ts'
import { adoptedThreshold, heaterCircuit, person, site } from '../schema/index.ts'

const adopter = alias(person, 'adopter')
const ender = alias(person, 'ender')

export type AdoptedRow = Awaited<ReturnType<typeof listAdoptions>>[number]

/** Adoptions, newest first; of one key or of all, and only those that nobody has ended where that is asked. */
export function listAdoptions(db: DbOrTx, filter: { key?: string; openOnly?: boolean } = {}) {
  return db
    .select({
      id: adoptedThreshold.id,
      key: adoptedThreshold.thresholdKey,
      value: adoptedThreshold.value,
      unit: adoptedThreshold.unit,
      source: adoptedThreshold.source,
      edition: adoptedThreshold.edition,
      reason: adoptedThreshold.reason,
      by: adopter.name,
      at: adoptedThreshold.adoptedAt,
      reviewAt: adoptedThreshold.reviewAt,
      endedAt: adoptedThreshold.endedAt,
      endedBy: ender.name,
    })
    .from(adoptedThreshold)
    .innerJoin(adopter, eq(adopter.id, adoptedThreshold.adoptedBy))
    .leftJoin(ender, eq(ender.id, adoptedThreshold.endedBy))
    .where(
      and(
        filter.key === undefined ? undefined : eq(adoptedThreshold.thresholdKey, filter.key),
        filter.openOnly === true ? isNull(adoptedThreshold.endedAt) : undefined,
      ),
    )
    .orderBy(desc(adoptedThreshold.id))
}

/**
 * Makes everybody else who adopts or ends a threshold wait for the rest of the transaction. The site's row is what is
 * locked: before the first adoption there is no row of its own to lock.
 */
export async function lockThresholds(tx: DbOrTx): Promise<void> {
  await tx.select({ id: site.id }).from(site).for('update')
}

/** Adds an adoption. @returns its id */
export async function insertAdoption(tx: DbOrTx, row: typeof adoptedThreshold.$inferInsert): Promise<number> {
  const [result] = await tx.insert(adoptedThreshold).values(row)
  return result.insertId
}

/** Ends an adoption that nobody has ended yet. @returns whether it was still open */
export async function endAdoption(
  tx: DbOrTx,
  id: number,
  end: { endedAt: Date; endedBy: number },
): Promise<boolean> {
  const [result] = await tx
    .update(adoptedThreshold)
    .set(end)
    .where(and(eq(adoptedThreshold.id, id), isNull(adoptedThreshold.endedAt)))
  return result.affectedRows === 1
}

/** Heater circuits of segments, by tag. */
export function listHeaters(db: DbOrTx, segmentIds: readonly number[]) {
  return db
    .select({
      tag: heaterCircuit.tag,
      kind: heaterCircuit.kind,
      volts: heaterCircuit.volts,
      powerW: heaterCircuit.powerW,
      earthing: heaterCircuit.earthing,
    })
    .from(heaterCircuit)
    .where(inArray(heaterCircuit.segmentId, [...segmentIds, 0]))
    .orderBy(asc(heaterCircuit.tag))
}
