/**
 * The product clock. Everything about the facility asks here and nothing asks the machine or the database.
 *
 * On a real site it is the machine's clock. In the demo it starts at a fixed instant, runs at the pace of real time only
 * while the product runs, and can be moved forward. The row holds a pair of instants (product, machine) that belong
 * together; web server and worker note the product's time every other second, so that a stop or a crash loses no more than that.
 */
import { sql } from 'drizzle-orm'
import type { Db, DbOrTx } from '../db/client.server.ts'
import { productClock } from '../db/schema/index.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { machineNow } from '../machine-time.server.ts'
import { writeRecord } from './record.server.ts'

interface ClockRow {
  demo: boolean
  baseAt: Date
  baseMachineAt: Date
}

/** How long a process may go on with the row it has read. */
const CACHE_MS = 1_000

/** One cache a database handle, so that tests with several databases in one process stay apart. */
const cache = new WeakMap<object, { row: ClockRow; readAt: number }>()

async function loadRow(db: DbOrTx): Promise<ClockRow> {
  const rows = await db
    .select({
      demo: productClock.demo,
      baseAt: productClock.baseAt,
      baseMachineAt: productClock.baseMachineAt,
    })
    .from(productClock)
    .limit(1)
  const row = rows[0]
  if (row === undefined) {
    throw new DomainError(
      'unavailable',
      'The product clock has not been set up: start the product with npm start.',
    )
  }
  return row
}

function timeBy(row: ClockRow, machine: Date): Date {
  if (!row.demo) return machine
  return new Date(row.baseAt.getTime() + machine.getTime() - row.baseMachineAt.getTime())
}

/** The product's time and whether it is the demo's. */
export async function readClock(db: Db): Promise<{ now: Date; demo: boolean }> {
  const machine = machineNow()
  const cached = cache.get(db)
  if (
    cached !== undefined &&
    machine.getTime() - cached.readAt < CACHE_MS &&
    machine.getTime() >= cached.readAt
  ) {
    return { now: timeBy(cached.row, machine), demo: cached.row.demo }
  }
  const row = await loadRow(db)
  cache.set(db, { row, readAt: machine.getTime() })
  return { now: timeBy(row, machine), demo: row.demo }
}

/** The product's time. */
export async function productNow(db: Db): Promise<Date> {
  return (await readClock(db)).now
}

/** Sets the clock up where there is none; an existing one is left as it is. */
export async function ensureClock(db: Db, options: { demo: boolean; startAt: Date }): Promise<void> {
  await db
    .insert(productClock)
    .values({
      id: 1,
      demo: options.demo,
      baseAt: options.startAt,
      baseMachineAt: machineNow(),
      seenAt: options.startAt,
    })
    .onDuplicateKeyUpdate({ set: { id: sql`id` } })
  cache.delete(db)
}

/** The time is noted every other second; when the last note is older than this, the product was not running. */
const STOPPED_AFTER_MS = 10_000

/**
 * Called when one of the product's processes starts: a demo clock goes on from where it was last seen, if the product stood
 * still since then. One that comes back beside another that went on changes nothing.
 *
 * @returns whether the clock was set back to where it was last seen
 */
export async function resumeClock(db: Db): Promise<boolean> {
  const resumed = await tx(db, async (inside) => {
    const rows = await inside.select().from(productClock).limit(1).for('update')
    const row = rows[0]
    const machine = machineNow()
    if (row === undefined || !row.demo) return false
    if (Math.abs(timeBy(row, machine).getTime() - row.seenAt.getTime()) <= STOPPED_AFTER_MS) return false
    await inside.update(productClock).set({ baseAt: row.seenAt, baseMachineAt: machine })
    return true
  })
  cache.delete(db)
  return resumed
}

/** Notes the product's time; called every other second while the product runs. Never goes back. */
export async function keepClock(db: Db): Promise<void> {
  const row = await loadRow(db)
  const now = timeBy(row, machineNow())
  await db.update(productClock).set({ seenAt: sql`GREATEST(${productClock.seenAt}, ${now})` })
}

/**
 * Moves the demo clock forward.
 *
 * @throws DomainError forbidden; bad-input when the time is not ahead or too far; conflict on a real site's clock
 */
export async function advanceClock(db: Db, actor: Actor, to: Date, reason: string): Promise<void> {
  demand(actor, 'clock:advance')
  await tx(db, async (inside) => {
    const rows = await inside.select().from(productClock).limit(1).for('update')
    const row = rows[0]
    if (row === undefined || !row.demo) {
      throw new DomainError('conflict', 'Only the demo clock can be moved; a real site follows the machine.')
    }
    const machine = machineNow()
    const now = timeBy(row, machine)
    if (to <= now) {
      throw new DomainError('bad-input', 'One field needs another look; nothing has been changed.', {
        fields: { to: ['The clock only moves forward. Give a time after the present one.'] },
      })
    }
    if (to.getTime() - now.getTime() > 400 * 86_400_000) {
      throw new DomainError('bad-input', 'One field needs another look; nothing has been changed.', {
        fields: { to: ['At most 400 days at a time.'] },
      })
    }
    await inside.update(productClock).set({ baseAt: to, baseMachineAt: machine, seenAt: to })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'demo clock moved forward',
      subjectKind: 'clock',
      subjectId: '1',
      before: { now: now.toISOString() },
      after: { now: to.toISOString() },
      reason,
    })
  })
  cache.delete(db)
}
