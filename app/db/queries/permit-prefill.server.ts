import { asc, inArray } from 'drizzle-orm'
import type { HeaterKind } from '../../domain/register.ts'
import type { DbOrTx } from '../client.server.ts'
import { heaterCircuit } from '../schema/index.ts'

export interface CircuitRow {
  tag: string
  kind: HeaterKind
  segmentId: number | null
  earthing: string
}

/** Heater circuits of segments. */
export function listCircuits(db: DbOrTx, segmentIds: readonly number[]): Promise<CircuitRow[]> {
  return db
    .select({
      tag: heaterCircuit.tag,
      kind: heaterCircuit.kind,
      segmentId: heaterCircuit.segmentId,
      earthing: heaterCircuit.earthing,
    })
    .from(heaterCircuit)
    .where(inArray(heaterCircuit.segmentId, [...segmentIds, 0]))
    .orderBy(asc(heaterCircuit.tag))
}
