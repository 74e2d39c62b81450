/** Making schedules of bakes, letting the worker propose places, moving bakes by hand, and saying which one counts. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listCarts, listPlans, listSupplies } from '../db/queries/bake-plans.server.ts'
import {
  insertSchedule,
  listSchedules,
  lockSchedule,
  putPlacement,
  replaceCurrent,
  type ScheduleRow,
  updateSchedule,
} from '../db/queries/bake-schedules.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { missingCaps } from '../domain/schedule/caps.ts'
import type { NewSchedule, ScheduleAct } from '../domain/schedule/forms.ts'
import { type Solution, search } from '../domain/schedule/solve.ts'
import { violations } from '../domain/schedule/violations.ts'
import { whyNowhere } from '../domain/schedule/why-not.ts'
import { enqueue } from './jobs.server.ts'
import { writeRecord } from './record.server.ts'
import { readScheduleParts, type ScheduleParts } from './schedule-of-bakes-problem.server.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 86_400_000
/** Schedules that the search builds and compares. */
const BUDGET = 150
/** The same schedule is looked for in the same way. */
const SEED = 1
/** How often the page hears how far the search is. */
const TELL_EVERY = 0.1

/**
 * Makes an empty schedule for open plans.
 *
 * @throws DomainError forbidden, bad-input (a plan that is not open)
 */
export async function createSchedule(db: Db, actor: Actor, now: Date, form: NewSchedule): Promise<number> {
  demand(actor, 'bake:plan')
  const open = (await listPlans(db)).filter(({ state }) => state === 'draft' || state === 'ready')
  const unknown = form.planIds.filter((planId) => !open.some(({ id }) => id === planId))
  if (unknown.length > 0) {
    throw new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: { plans: [`Plan ${unknown.join(', ')} is no longer a draft or ready. Tick open plans only.`] },
    })
  }
  // Hours of the window begin at a full hour of the site.
  const fromMs = Math.floor(form.fromAt.getTime() / HOUR_MS) * HOUR_MS
  return tx(db, async (inside) => {
    const scheduleId = await insertSchedule(inside, {
      title: form.title,
      state: 'draft',
      objective: form.objective,
      fromAt: new Date(fromMs),
      untilAt: new Date(fromMs + form.days * DAY_MS),
      madeBy: actor.personId,
      madeAt: now,
    })
    for (const planId of form.planIds) await putPlacement(inside, { scheduleId, planId, trouble: [] })
    await record(inside, actor, now, 'schedule of bakes made', scheduleId, { ...form })
    return scheduleId
  })
}

/**
 * One schedule by its id.
 *
 * @throws DomainError not-found
 */
export async function findSchedule(db: DbOrTx, id: number): Promise<ScheduleRow> {
  const [found] = await listSchedules(db, { id })
  if (found === undefined) throw new DomainError('not-found', `There is no schedule of bakes ${id}.`)
  return found
}

/**
 * Does what a person asked of a schedule.
 *
 * @returns one sentence that says what was done
 * @throws DomainError forbidden, not-found, conflict (changed since it was read), bad-input, not-acceptable-now
 */
export async function actOnSchedule(db: Db, actor: Actor, now: Date, act: ScheduleAct): Promise<string> {
  demand(actor, 'bake:plan')
  const schedule = await findSchedule(db, act.scheduleId)
  if (act.act === 'propose') return propose(db, actor, now, act)
  const parts = await readScheduleParts(db, schedule)
  return act.act === 'move'
    ? move(db, actor, now, schedule, parts, act)
    : makeCurrent(db, actor, now, parts, act)
}

async function changing(inside: DbOrTx, act: { scheduleId: number; revision: number }): Promise<void> {
  const row = await lockSchedule(inside, act.scheduleId)
  if (row === null) throw new DomainError('not-found', `There is no schedule of bakes ${act.scheduleId}.`)
  if (row.revision !== act.revision) {
    throw new DomainError(
      'conflict',
      'Somebody has changed this schedule since the page was made. Look at it again; nothing has been saved.',
    )
  }
}

async function propose(
  db: Db,
  actor: Actor,
  now: Date,
  act: { scheduleId: number; revision: number },
): Promise<string> {
  await tx(db, async (inside) => {
    await changing(inside, act)
    await updateSchedule(inside, act.scheduleId, {
      state: 'solving',
      progress: 0,
      fault: null,
      revision: act.revision + 1,
    })
    await enqueue(inside, { kind: 'solve-schedule', payload: { scheduleId: act.scheduleId } })
    await record(inside, actor, now, 'schedule of bakes: places asked for', act.scheduleId, {})
  })
  return 'Places are being looked for. The page shows how far it is.'
}

/**
 * Looks for places and writes them down: for the worker. Doing it twice comes to the same; a schedule that somebody has
 * changed meanwhile is left as it is.
 */
export async function solveSchedule(db: Db, scheduleId: number, signal: AbortSignal): Promise<void> {
  const schedule = await findSchedule(db, scheduleId)
  if (schedule.state !== 'solving') return
  try {
    const parts = await readScheduleParts(db, schedule)
    const lacking = missingCaps(parts.problem.rules)
    if (lacking.length > 0) throw new DomainError('not-acceptable-now', lacking.join(' '))
    const found = await searchSlowly(db, schedule, parts, signal)
    if (found !== null) await keepSolution(db, schedule, parts, found)
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
    await updateSchedule(db, scheduleId, { state: 'failed', fault: error.message })
  }
}

async function searchSlowly(
  db: Db,
  schedule: ScheduleRow,
  { problem, placements }: ScheduleParts,
  signal: AbortSignal,
): Promise<Solution | null> {
  const steps = search(problem, placements, schedule.objective, { seed: SEED, budget: BUDGET })
  let told = 0
  for (;;) {
    const step = steps.next()
    if (step.done === true) return step.value
    if (signal.aborted) return null
    if (step.value.share >= told + TELL_EVERY) {
      told = step.value.share
      await updateSchedule(db, schedule.id, { progress: told })
    }
    // Lets the worker renew its lease and keep the clock between two schedules.
    await new Promise((resolve) => setImmediate(resolve))
  }
}

async function keepSolution(
  db: Db,
  schedule: ScheduleRow,
  parts: ScheduleParts,
  found: Solution,
): Promise<void> {
  await tx(db, async (inside) => {
    const row = await lockSchedule(inside, schedule.id)
    if (row === null || row.state !== 'solving' || row.revision !== schedule.revision) return
    await writeSolution(inside, row, parts, found)
  })
}

/** Writes down what a search has found, and why a bake has no place. The schedule's own row is locked by the caller. */
export async function writeSolution(
  inside: DbOrTx,
  { id, revision }: Pick<ScheduleRow, 'id' | 'revision'>,
  { problem }: ScheduleParts,
  { placements, value, bound, boundWhy, gap, built }: Solution,
): Promise<void> {
  const ids = await equipmentIds(inside)
  for (const one of placements) {
    const job = problem.jobs.find((candidate) => candidate.id === one.jobId)
    if (job === undefined || job.underWay) continue
    await putPlacement(inside, {
      scheduleId: id,
      planId: Number(one.jobId),
      startsAt: one.startH === null ? null : new Date(problem.fromMs + one.startH * HOUR_MS),
      supplySetId: ids.supply(one.supply),
      cartId: ids.cart(one.cart),
      pinned: one.pinned,
      trouble: one.startH === null ? whyNowhere(problem, placements, one.jobId) : [],
    })
  }
  await updateSchedule(inside, id, {
    state: 'solved',
    progress: 1,
    outcome: { value, bound, boundWhy, gap, built },
    revision: revision + 1,
  })
}

async function equipmentIds(db: DbOrTx) {
  const [supplies, carts] = await Promise.all([listSupplies(db), listCarts(db)])
  const idOf = (rows: readonly { id: number; tag: string }[]) => (tag: string | null) =>
    rows.find((row) => row.tag === tag)?.id ?? null
  return { supply: idOf(supplies), cart: idOf(carts) }
}

async function move(
  db: Db,
  actor: Actor,
  now: Date,
  schedule: ScheduleRow,
  { problem, placements }: ScheduleParts,
  act: Extract<ScheduleAct, { act: 'move' }>,
): Promise<string> {
  const jobId = String(act.planId)
  const job = problem.jobs.find(({ id }) => id === jobId)
  if (job === undefined || job.underWay)
    throw new DomainError('bad-input', `Plan ${act.planId} is not one that this schedule can move.`)
  const startH = Math.round((act.startsAt.getTime() - problem.fromMs) / HOUR_MS)
  const startsAt = new Date(problem.fromMs + startH * HOUR_MS)
  const placement = { jobId, startH, supply: act.supply || null, cart: act.cart || null, pinned: act.pinned }
  const moved = [...placements.filter((one) => one.jobId !== jobId), placement]
  const trouble = violations(problem, moved)
    .filter(({ severity, jobs }) => severity === 'breaks' && jobs.includes(jobId))
    .map(({ text }) => text)
  const ids = await equipmentIds(db)
  await tx(db, async (inside) => {
    await changing(inside, act)
    await putPlacement(inside, {
      scheduleId: schedule.id,
      planId: act.planId,
      startsAt,
      supplySetId: ids.supply(placement.supply),
      cartId: ids.cart(placement.cart),
      pinned: act.pinned,
      trouble,
    })
    // What the search said of its own schedule does not hold for one that a person has changed.
    const state = schedule.state === 'current' ? 'current' : 'draft'
    await updateSchedule(inside, schedule.id, { state, outcome: null, revision: act.revision + 1 })
    await record(inside, actor, now, 'schedule of bakes: bake moved', schedule.id, { ...placement, startsAt })
  })
  return trouble.length === 0
    ? `${job.label} moved; nothing breaks.`
    : `${job.label} moved; ${trouble.length === 1 ? 'one thing breaks' : `${trouble.length} things break`}.`
}

async function makeCurrent(
  db: Db,
  actor: Actor,
  now: Date,
  { problem, placements }: ScheduleParts,
  act: { scheduleId: number; revision: number },
): Promise<string> {
  const broken = violations(problem, placements).filter(({ severity }) => severity === 'breaks')
  if (broken.length > 0) {
    throw new DomainError('not-acceptable-now', 'The schedule does not become the current one: it breaks', {
      fields: { form: broken.map(({ text }) => text) },
    })
  }
  if (placements.some(({ startH }) => startH === null)) {
    throw new DomainError(
      'not-acceptable-now',
      'The schedule does not become the current one: a bake has no place yet. Move it somewhere, or propose places.',
    )
  }
  await tx(db, async (inside) => {
    await changing(inside, act)
    await replaceCurrent(inside, act.scheduleId)
    await updateSchedule(inside, act.scheduleId, { state: 'current', revision: act.revision + 1 })
    await record(inside, actor, now, 'schedule of bakes made current', act.scheduleId, {})
  })
  return 'This is the current schedule now.'
}

async function record(
  inside: DbOrTx,
  actor: Actor,
  now: Date,
  act: string,
  scheduleId: number,
  after: Record<string, unknown>,
): Promise<void> {
  await writeRecord(inside, {
    at: now,
    actor,
    act,
    subjectKind: 'bake-schedule',
    subjectId: String(scheduleId),
    after,
  })
}
