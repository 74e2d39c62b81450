/** The readings of a file that is taken in, from its bytes into the database, within the transaction of the caller. */
import type mysql from 'mysql2'
import type { DbOrTx } from '../db/client.server.ts'
import {
  areFree,
  createIncoming,
  type LoadedStretch,
  loadIncoming,
  loadStraight,
  type MergeCounts,
  mergeIncoming,
  noteStretches,
} from '../db/queries/imports-merge.server.ts'
import { DomainError } from '../domain/errors.ts'
import type { ReadOut } from '../domain/night-files/types.ts'
import type { ReadingRules } from './intake-reading.server.ts'
import { incomingRows, type ReadAgain } from './intake-rows.server.ts'

/** The file reads otherwise than its report said (the register has changed since), so that must not be built upon. */
export class OtherThanReported extends Error {}

/**
 * Reads a file again and stores its readings. Where the report says that nothing is stored for its stretches and that
 * it holds one reading an instant, they go straight to their place; else they are compared with those held first.
 *
 * @param on one connection, for what is in the transaction and for LOAD DATA
 * @throws DomainError not-acceptable-now; OtherThanReported, to be tried again without going straight
 */
export async function storeReadings(
  on: { inside: DbOrTx; raw: mysql.PoolConnection },
  importId: number,
  report: ReadOut,
  rules: ReadingRules,
  original: AsyncIterable<Uint8Array>,
  mayGoStraight: boolean,
): Promise<{ readOut: ReadOut; counts: MergeCounts }> {
  const expected = stretchesOf(report, rules)
  const straight = mayGoStraight && expected !== null && (await areFree(on.inside, expected))
  const again: ReadAgain = { sent: 0, readOut: null }
  const rows = incomingRows(original, rules, again)
  if (!straight) await createIncoming(on.inside)
  const loading = straight ? loadStraight(on.raw, rows, importId) : loadIncoming(on.raw, rows)
  const { loaded, warnings } = await loading
  const { readOut } = again
  if (readOut === null || loaded > again.sent)
    throw new Error(`Import ${importId}: ${loaded} rows of ${again.sent} loaded`)
  if (straight && !sameStretches(expected, stretchesOf(readOut, rules))) throw new OtherThanReported()
  if (loaded < again.sent) {
    throw new DomainError(
      'not-acceptable-now',
      'The file holds readings of one channel and instant very far apart, too far to compare them. Split it where it begins anew and send the parts.',
    )
  }
  if (warnings > 0) throw new Error(`Import ${importId}: the database had ${warnings} warnings while loading`)
  if (!straight) return { readOut, counts: await mergeIncoming(on.inside, importId) }
  await noteStretches(on.inside, importId, expected)
  return { readOut, counts: { stored: loaded, held: 0, conflicting: 0 } }
}

/** What each channel gets by a report; null where two readings of one instant would have to be looked at. */
function stretchesOf(report: ReadOut, rules: ReadingRules): LoadedStretch[] | null {
  const ids = new Map(rules.channels.map(({ id, name }) => [name, id]))
  const stretches: LoadedStretch[] = []
  for (const { name, count, conflicts, firstMs, lastMs } of report.channels) {
    if (count === 0) continue
    const channelId = ids.get(name)
    if (channelId === undefined || conflicts > 0 || firstMs === null || lastMs === null) return null
    stretches.push({
      channelId,
      firstAt: new Date(firstMs),
      lastAt: new Date(lastMs),
      readingCount: count,
    })
  }
  return stretches
}

function sameStretches(a: readonly LoadedStretch[], b: readonly LoadedStretch[] | null): boolean {
  const key = (stretches: readonly LoadedStretch[]) =>
    JSON.stringify(stretches.toSorted((one, other) => one.channelId - other.channelId))
  return b !== null && key(a) === key(b)
}
