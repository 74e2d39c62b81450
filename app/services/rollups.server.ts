/**
 * Keeps the rollups of readings. Whatever changes readings says in the same transaction which stretch it has changed;
 * the worker makes the rollups of such stretches anew, and until it has, they are read from the readings themselves.
 */
import type { Db } from '../db/client.server.ts'
import { correctionsFor } from '../db/queries/clock-corrections.server.ts'
import {
  deleteDue,
  findDueChannel,
  insertDue,
  lockDue,
  rollUpReadings,
  rollUpRollups,
} from '../db/queries/rollups.server.ts'
import { tx } from '../db/transaction.server.ts'
import { widened } from '../domain/clock-correction.ts'
import { ROLLUP_LEVELS, wholeBuckets } from '../domain/rollups.ts'
import { enqueue } from './jobs.server.ts'

/** Stretches of one channel that are taken in one transaction. */
const AT_ONCE = 500
/** As much of a channel as one transaction reads; the rest stays due. */
const LONGEST_MS = 31 * 86_400_000

/**
 * Makes the rollups of everything that is due, channel by channel, until nothing is or the signal comes.
 *
 * @param most transactions after which it stops with the rest still due
 * @returns how many transactions that took
 */
export async function makeRollups(
  db: Db,
  signal: AbortSignal,
  most: number = Number.POSITIVE_INFINITY,
): Promise<number> {
  for (let count = 0; ; count += 1) {
    if (signal.aborted || count >= most) return count
    const channelId = await findDueChannel(db)
    if (channelId === null) return count
    await rollUpChannel(db, channelId)
  }
}

/** One job's share: a year of many channels is many transactions, and other jobs want their turn in between. */
const TURNS_A_JOB = 40

/** Makes a share of the rollups that are due, and asks for another job when there may be more. */
export async function makeShareOfRollups(db: Db, signal: AbortSignal): Promise<number> {
  const turns = await makeRollups(db, signal, TURNS_A_JOB)
  if (turns === TURNS_A_JOB) await tx(db, (inside) => enqueue(inside, { kind: 'roll-up', payload: {} }))
  return turns
}

async function rollUpChannel(db: Db, channelId: number): Promise<void> {
  const [shortest, ...longer] = ROLLUP_LEVELS
  await tx(db, async (inside) => {
    const due = await lockDue(inside, channelId, AT_ONCE)
    if (due.length === 0) return
    // After the lock: a correction that is made now leaves a stretch of its own behind, which is taken next.
    const corrections = await correctionsFor(inside, [channelId])
    const own = corrections.get(channelId) ?? []
    const now: { fromMs: number; lastMs: number }[] = []
    const later: { channelId: number; from: Date; last: Date }[] = []
    for (const { from, last } of due) {
      const end = Math.min(last.getTime(), from.getTime() + LONGEST_MS)
      now.push(widened(own, from.getTime(), end))
      if (end < last.getTime()) later.push({ channelId, from: new Date(end), last })
    }
    const spans = wholeBuckets(now, shortest)
    for (const span of spans) await rollUpReadings(inside, channelId, span, corrections)
    for (const level of longer) {
      const wider = wholeBuckets(
        spans.map(({ fromMs, toMs }) => ({ fromMs, lastMs: toMs - 1 })),
        level,
      )
      for (const span of wider) await rollUpRollups(inside, channelId, level, span)
    }
    await deleteDue(
      inside,
      due.map(({ id }) => id),
    )
    await insertDue(inside, later)
  })
}
