/** Making, changing, signing and withdrawing bake plans. A version is never edited; a new one takes its place. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  insertPlan,
  insertPlanTick,
  insertPlanVersion,
  listPlans,
  listPlanVersions,
  lockPlan,
  replacePlanSegments,
  updatePlan,
} from '../db/queries/bake-plans.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { pairObjection } from '../domain/bake-load.ts'
import { BAKE_PLAN_STATE_LABELS, type BakePlanContent, permitWindows } from '../domain/bake-plan.ts'
import { differences } from '../domain/bake-plan-differences.ts'
import { type PlanPrediction, PlanPredictionSchema } from '../domain/bake-plan-prediction.ts'
import { blockingItems, readiness, TICKED_ITEMS, type TickedItem } from '../domain/bake-plan-readiness.ts'
import { DomainError } from '../domain/errors.ts'
import type { BakePlanState, PlanPriority } from '../domain/planning.ts'
import { SEGMENT_STATES } from '../domain/segment-states.ts'
import {
  bakedSegments,
  contentOf,
  planSegments,
  predictFromRegister,
  readPlanFacts,
} from './bake-plans-facts.server.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'

/** Only these can still be changed. */
const OPEN_STATES: readonly BakePlanState[] = ['draft', 'ready']

/**
 * Makes a draft.
 *
 * @returns the plan's id
 * @throws DomainError forbidden, bad-input (unknown or repeated segment, a pair of two diameters, nothing above ambient)
 */
export async function createPlan(
  db: Db,
  actor: Actor,
  now: Date,
  form: { title: string; content: BakePlanContent },
): Promise<number> {
  demand(actor, 'bake:plan')
  const { segmentIds, predicted } = await checkedContent(db, form.content, now)
  return tx(db, async (inside) => {
    const planId = await insertPlan(inside, {
      title: form.title,
      state: 'draft',
      createdBy: actor.personId,
      createdAt: now,
    })
    await replacePlanSegments(inside, planId, segmentIds)
    await insertPlanVersion(inside, {
      planId,
      version: 1,
      content: form.content,
      predicted,
      reason: 'First version',
      madeBy: actor.personId,
      madeAt: now,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bake plan made',
      ...subjectOf(planId),
      after: { title: form.title, ...form.content },
    })
    return planId
  })
}

/**
 * Puts a new version in place of the last one. A plan that was ready is a draft again: what was signed was the other.
 *
 * @throws DomainError forbidden, not-found, conflict (changed since it was read), not-acceptable-now (no longer open),
 *   bad-input (nothing changed, or the content cannot be)
 */
export async function addPlanVersion(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  form: { revision: number; title: string; content: BakePlanContent; reason: string },
): Promise<{ version: number; wasReady: boolean }> {
  demand(actor, 'bake:plan')
  const { segmentIds, predicted } = await checkedContent(db, form.content, now)
  return tx(db, async (inside) => {
    const plan = await openPlan(inside, planId, form.revision)
    const last = (await listPlanVersions(inside, planId)).at(-1)
    const changed = last === undefined ? [] : differences(contentOf(last.content), form.content)
    if (changed.length === 0 && form.title === plan.title) {
      throw new DomainError(
        'bad-input',
        'Nothing differs from the version that stands. Change something, or leave it.',
      )
    }
    const version = plan.version + 1
    await insertPlanVersion(inside, {
      planId,
      version,
      content: form.content,
      predicted,
      reason: form.reason,
      madeBy: actor.personId,
      madeAt: now,
    })
    await replacePlanSegments(inside, planId, segmentIds)
    await change(inside, planId, form.revision, {
      title: form.title,
      version,
      state: 'draft',
      baselineVersion: null,
      readyBy: null,
      readyAt: null,
      readySignedActId: null,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bake plan changed',
      ...subjectOf(planId),
      before: { version: plan.version, state: plan.state },
      after: { version, state: 'draft', differences: changed },
      reason: form.reason,
    })
    return { version, wasReady: plan.state === 'ready' }
  })
}

/**
 * Signs a plan as ready: its version becomes the baseline that the bake is held against.
 *
 * @throws DomainError forbidden, not-found, conflict, not-acceptable-now (steps missing: they are listed; or no draft),
 *   signature-refused
 */
export async function signPlanReady(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  form: { revision: number; password: string },
): Promise<void> {
  demand(actor, 'bake:plan')
  refuseMissing(await missingSteps(db, planId, now), 'The plan stays a draft.')
  const subject = { meaning: 'sign a bake plan as ready', ...subjectOf(planId) }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const plan = await openPlan(inside, planId, form.revision)
    if (plan.state === 'ready')
      throw new DomainError('not-acceptable-now', 'This plan is signed as ready already.')
    // Once more inside: a step may have been taken back while the password was typed.
    refuseMissing(await missingSteps(inside, planId, now), 'The plan stays a draft.')
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    await change(inside, planId, form.revision, {
      state: 'ready',
      baselineVersion: plan.version,
      readyBy: actor.personId,
      readyAt: now,
      readySignedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bake plan ready',
      ...subjectOf(planId),
      before: { state: plan.state },
      after: { state: 'ready', baselineVersion: plan.version },
      signedActId: act.id,
    })
  })
}

/** Takes a plan out of the running for good, with the reason. */
export async function withdrawPlan(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  form: { revision: number; reason: string },
): Promise<void> {
  demand(actor, 'bake:plan')
  await tx(db, async (inside) => {
    const plan = await openPlan(inside, planId, form.revision)
    await change(inside, planId, form.revision, {
      state: 'withdrawn',
      closedBy: actor.personId,
      closedAt: now,
      closeReason: form.reason,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bake plan withdrawn',
      ...subjectOf(planId),
      before: { state: plan.state },
      after: { state: 'withdrawn' },
      reason: form.reason,
    })
  })
}

/**
 * Moves a plan on as its bake begins and ends. The state of the segments decides whether that is so, not the button.
 *
 * @throws DomainError forbidden, not-found, conflict, not-acceptable-now (not ready, no segment hot yet, or one still hot)
 */
export async function movePlanOn(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  form: { revision: number; to: 'under-way' | 'done'; reason: string },
): Promise<void> {
  demand(actor, 'bake:note')
  await tx(db, async (inside) => {
    const plan = await lockPlan(inside, planId)
    if (plan === null) throw notFound(planId)
    if (plan.revision !== form.revision) throw stale()
    const from = form.to === 'under-way' ? 'ready' : 'under-way'
    if (plan.state !== from) {
      throw new DomainError(
        'not-acceptable-now',
        `This plan is ${BAKE_PLAN_STATE_LABELS[plan.state].toLowerCase()}; only a plan that is ${BAKE_PLAN_STATE_LABELS[from].toLowerCase()} can become ${BAKE_PLAN_STATE_LABELS[form.to].toLowerCase()}.`,
      )
    }
    await requireHeat(inside, planId, form.to, now)
    const closed = { closedBy: actor.personId, closedAt: now, closeReason: form.reason }
    await change(inside, planId, form.revision, { state: form.to, ...(form.to === 'done' ? closed : {}) })
    await writeRecord(inside, {
      at: now,
      actor,
      act: form.to === 'done' ? 'bake plan done' : 'bake plan under way',
      ...subjectOf(planId),
      before: { state: plan.state },
      after: { state: form.to },
      reason: form.reason,
    })
  })
}

async function requireHeat(
  inside: DbOrTx,
  planId: number,
  to: 'under-way' | 'done',
  now: Date,
): Promise<void> {
  const { content } = await readPlan(inside, planId)
  const segments = await planSegments(inside, content.segments, now)
  const hot = segments.filter(({ state }) => SEGMENT_STATES[state].hot).map(({ tag }) => tag)
  if (to === 'under-way' && hot.length === 0) {
    throw new DomainError(
      'not-acceptable-now',
      `${content.segments.join(' and ')} ${segments.length === 1 ? 'is' : 'are'} not recorded as heated. Set the state of the segment when heating is on, then come back.`,
    )
  }
  if (to === 'done' && hot.length > 0) {
    throw new DomainError(
      'not-acceptable-now',
      `${hot.join(' and ')} ${hot.length === 1 ? 'is' : 'are'} still recorded as hot. A bake is done when its tube is cold.`,
    )
  }
}

/** Says which plan goes first where two want the same thing. Does not touch the plan's content or its signature. */
export async function setPlanPriority(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  form: { revision: number; priority: PlanPriority; reason: string },
): Promise<void> {
  demand(actor, 'bake:prioritise')
  await tx(db, async (inside) => {
    const plan = await openPlan(inside, planId, form.revision)
    if (plan.priority === form.priority) {
      throw new DomainError('bad-input', 'The plan has this priority already.')
    }
    await change(inside, planId, form.revision, { priority: form.priority })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bake plan priority set',
      ...subjectOf(planId),
      before: { priority: plan.priority },
      after: { priority: form.priority },
      reason: form.reason,
    })
  })
}

/** Ticks a step of the checklist, or takes the tick back. A ready plan whose tick is taken back is a draft again. */
export async function tickPlanStep(
  db: Db,
  actor: Actor,
  now: Date,
  planId: number,
  form: { item: TickedItem; done: boolean; note: string },
): Promise<void> {
  demand(actor, 'bake:note')
  await tx(db, async (inside) => {
    const plan = await lockPlan(inside, planId)
    if (plan === null) throw notFound(planId)
    requireOpen(plan.state)
    await insertPlanTick(inside, { planId, ...form, setBy: actor.personId, setAt: now })
    if (!form.done && plan.state === 'ready') {
      await change(inside, planId, plan.revision, {
        state: 'draft',
        baselineVersion: null,
        readyBy: null,
        readyAt: null,
        readySignedActId: null,
      })
    }
    await writeRecord(inside, {
      at: now,
      actor,
      act: form.done ? 'bake plan step ticked' : 'bake plan step taken back',
      ...subjectOf(planId),
      after: { step: TICKED_ITEMS[form.item], done: form.done },
      reason: form.note,
    })
  })
}

/** What a permit for a bake starts from. */
export interface PermitRequest {
  planId: number
  title: string
  segments: readonly string[]
  planner: string
  celsius: number
  supply: string
  cart: string
  amps: number
  volts: number
  /** One window for each permit of the chain; instants where the plan has a start. */
  windows: { number: number; fromH: number; toH: number; from: Date | null; to: Date | null }[]
}

/**
 * What a permit request for this plan is pre-filled with.
 *
 * @throws DomainError not-found; not-acceptable-now with the list of missing steps, or when the plan is not signed
 */
export async function permitRequest(db: Db, actor: Actor, now: Date, planId: number): Promise<PermitRequest> {
  demand(actor, 'permit:draft')
  const { plan, content, prediction } = await readPlan(db, planId)
  const facts = await readPlanFacts(db, { id: planId, content, prediction }, now)
  refuseMissing(blockingItems(readiness(facts)), 'No permit can be asked for.')
  if (plan.state !== 'ready' && plan.state !== 'under-way') {
    throw new DomainError(
      'not-acceptable-now',
      `This plan is ${BAKE_PLAN_STATE_LABELS[plan.state].toLowerCase()}. A permit is asked for a plan that an engineer has signed as ready.`,
    )
  }
  const start = content.startsAt === null ? null : Date.parse(content.startsAt)
  const instant = (hours: number) => (start === null ? null : new Date(start + hours * 3_600_000))
  return {
    planId,
    title: plan.title,
    segments: content.segments,
    planner: plan.createdBy,
    celsius: content.celsius,
    supply: content.supply ?? '',
    cart: content.cart ?? '',
    ...facts.load,
    windows: permitWindows(prediction.steps).map((one) => ({
      ...one,
      from: instant(one.fromH),
      to: instant(one.toH),
    })),
  }
}

/** A plan with its present version, checked. */
export async function readPlan(db: DbOrTx, planId: number) {
  const [plan] = await listPlans(db, { planId })
  if (plan === undefined) throw notFound(planId)
  const prediction: PlanPrediction = PlanPredictionSchema.parse(plan.predicted)
  return { plan, content: contentOf(plan.content), prediction }
}

async function missingSteps(db: DbOrTx, planId: number, now: Date) {
  const { content, prediction } = await readPlan(db, planId)
  return blockingItems(readiness(await readPlanFacts(db, { id: planId, content, prediction }, now)))
}

function refuseMissing(missing: { label: string; detail: string }[], consequence: string): void {
  if (missing.length === 0) return
  const many = missing.length === 1 ? 'One step is missing' : `${missing.length} steps are missing`
  throw new DomainError('not-acceptable-now', `${consequence} ${many}:`, {
    fields: { form: missing.map(({ label, detail }) => (detail === '' ? label : `${label}: ${detail}`)) },
  })
}

function subjectOf(planId: number) {
  return { subjectKind: 'bake-plan', subjectId: String(planId) }
}

function notFound(planId: number): DomainError {
  return new DomainError('not-found', `There is no bake plan ${planId}.`)
}

async function openPlan(inside: DbOrTx, planId: number, revision: number) {
  const plan = await lockPlan(inside, planId)
  if (plan === null) throw notFound(planId)
  if (plan.revision !== revision) throw stale()
  requireOpen(plan.state)
  return plan
}

function requireOpen(state: BakePlanState): void {
  if (OPEN_STATES.includes(state)) return
  throw new DomainError(
    'not-acceptable-now',
    `This plan is ${BAKE_PLAN_STATE_LABELS[state].toLowerCase()} and can no longer be changed. Make a new plan.`,
  )
}

async function change(
  inside: DbOrTx,
  planId: number,
  revision: number,
  values: Parameters<typeof updatePlan>[3],
): Promise<void> {
  if (!(await updatePlan(inside, planId, revision, values))) throw stale()
}

function stale(): DomainError {
  return new DomainError(
    'conflict',
    'Somebody changed this plan since you opened it. Nothing of yours has been saved: look at it again and repeat what still fits.',
  )
}

async function checkedContent(db: Db, content: BakePlanContent, now: Date) {
  const fault = (field: string, message: string) =>
    new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: { [field]: [message] },
    })
  const segments = await planSegments(db, content.segments, now)
  const [first, second] = await bakedSegments(db, segments)
  if (first !== undefined && second !== undefined) {
    if (first.tag === second.tag)
      throw fault('segments', `${first.tag} is named twice. Name two segments, or one.`)
    const objection = pairObjection(first, second)
    if (objection !== null) throw fault('segments', objection)
  }
  if (content.pumpChangeC > content.celsius) {
    throw fault(
      'pumpChangeC',
      `The pumps are changed on the way down: give a temperature below ${content.celsius} °C.`,
    )
  }
  if (content.celsius <= content.coldC) {
    throw fault('celsius', `A bake is hotter than the touch limit of ${content.coldC} °C.`)
  }
  const predicted = await predictFromRegister(db, content, now)
  return { segmentIds: segments.map(({ id }) => id), predicted }
}
