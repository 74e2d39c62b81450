/**
 * Making, changing and acting on permits. Every act goes through the table of domain/permits.ts, is done to the
 * revision that the person saw or not at all, and is kept with who, when and what was said. What somebody is not
 * allowed to do is written down too.
 */
import { randomInt } from 'node:crypto'
import { isDeepStrictEqual } from 'node:util'
import { tzOffset } from '@date-fns/tz'
import type { Db, DbOrTx } from '../db/client.server.ts'
import { hasShortCode, lockHighestNumber } from '../db/queries/permit-numbers.server.ts'
import {
  findPermit,
  insertPermit,
  insertPermitAct,
  insertPermitVersion,
  listPermitActs,
  lockPermit,
  type PermitRow,
  setPermitSegments,
  updatePermit,
} from '../db/queries/permits.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError, type ErrorCode } from '../domain/errors.ts'
import { PERMIT_ACT_DETAILS } from '../domain/permit-act-details.ts'
import { dueAct } from '../domain/permit-clock.ts'
import { type PermitContent, PermitContentSchema } from '../domain/permit-content.ts'
import { type Reason, wrongState } from '../domain/permit-reasons.ts'
import { PERMIT_STATE_LABELS, type PermitState } from '../domain/permit-words.ts'
import {
  PERMIT_RULES,
  type PermitEffect,
  type PermitStep,
  permitStep,
  productStep,
} from '../domain/permits.ts'
import type { FormAct } from '../domain/schemas/permit-act.ts'
import { officersApart, permitActor, readPermitFacts } from './permit-facts.server.ts'
import { writeRecord } from './record.server.ts'
import { noteDangers } from './safety-events.server.ts'
import {
  type SignedAct,
  type SignedSubject,
  signAct,
  useSignedAct as spendSignature,
} from './signature.server.ts'
import { getSite, instantWriter } from './site.server.ts'

/** Letters and digits that cannot be taken for one another on paper or on the phone. */
const CODE_LETTERS = '234679ACDEFGHJKMNPQRTWXY'
const CODE_LENGTH = 6
const HOUR_MS = 3_600_000

export interface PermitActForm {
  act: FormAct
  /** Revision of the permit that the person looked at. */
  revision: number
  reason: string
  /** The signer's own, for acts that are signed. */
  password: string
  /** See domain/permit-act-details.ts. */
  detail: unknown
}

/**
 * Makes a draft.
 *
 * @returns its number
 * @throws DomainError forbidden
 */
export async function createPermit(
  db: Db,
  actor: Actor,
  now: Date,
  form: { content: PermitContent },
): Promise<string> {
  demand(actor, 'permit:draft')
  const content = PermitContentSchema.parse(form.content)
  return tx(db, async (inside) => {
    const site = await getSite(inside)
    const local = new Date(now.getTime() + tzOffset(site.timeZone, now) * 60_000)
    const prefix = `HSP-${local.getUTCFullYear()}-`
    const running = (await lockHighestNumber(inside, site.id, prefix)) + 1
    const number = `${prefix}${String(running).padStart(3, '0')}`
    const permitId = await insertPermit(
      inside,
      {
        number,
        shortCode: await freeShortCode(inside),
        state: 'draft',
        createdBy: actor.personId,
        createdAt: now,
        ...columnsOf(content),
      },
      { content, reason: '' },
    )
    await insertPermitAct(inside, {
      permitId,
      act: 'draft',
      fromState: 'draft',
      toState: 'draft',
      revision: 1,
      version: 1,
      at: now,
      recordedAt: now,
      personId: actor.personId,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'permit drafted',
      ...subjectOf(number),
      after: { title: content.title, segments: content.segments },
    })
    return number
  })
}

async function freeShortCode(inside: DbOrTx): Promise<string> {
  for (;;) {
    const code = Array.from({ length: CODE_LENGTH }, () => CODE_LETTERS[randomInt(CODE_LETTERS.length)]).join(
      '',
    )
    if (!(await hasShortCode(inside, code))) return code
  }
}

/** What the permit's row repeats of its content. The plan stays known though a later version no longer names it. */
function columnsOf({ planId, from, to }: PermitContent) {
  return {
    ...(planId === null ? {} : { planId }),
    windowFrom: from === null ? null : new Date(from),
    windowTo: to === null ? null : new Date(to),
  }
}

/**
 * Puts a new version in place of the one that stands. Of a permit that is approved or suspended this changes the
 * terms: its approval is void and it waits for an officer again.
 *
 * @returns the revision and version that stand now; unchanged where nothing differs
 * @throws DomainError forbidden, not-found, conflict (changed since it was read), not-acceptable-now, bad-input
 */
export async function savePermit(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  form: { revision: number; content: PermitContent; reason: string },
): Promise<{ revision: number; version: number; state: PermitState }> {
  demand(actor, 'permit:draft')
  const content = PermitContentSchema.parse(form.content)
  await noteDue(db, now, number)
  return tx(db, async (inside) => {
    const permit = await currentPermit(inside, number, form.revision)
    if (isDeepStrictEqual(permit.content, content)) {
      return { revision: permit.revision, version: permit.version, state: permit.state }
    }
    const act = editingAct(permit.state)
    const version = permit.version + 1
    const changed: PermitRow = { ...permit, content, ...columnsOf(content) }
    const facts = await readPermitFacts(inside, changed, now, { act })
    const outcome = permitStep(
      facts,
      await permitActor(inside, actor, now),
      act,
      { reason: form.reason, detail: {} },
      now,
    )
    if (outcome.kind === 'refused') throw refusal(outcome.reasons)
    await insertPermitVersion(inside, {
      permitId: permit.id,
      version,
      content,
      reason: outcome.reason,
      madeBy: actor.personId,
      madeAt: now,
    })
    await setPermitSegments(inside, permit.id, content.segments)
    await carryOut(inside, permit, outcome, { actor, now, version, planId: changed.planId })
    return { revision: permit.revision + 1, version, state: outcome.to }
  })
}

function editingAct(state: PermitState): 'edit' | 'change-terms' {
  if (state === 'draft' || state === 'returned') return 'edit'
  if (state === 'approved' || state === 'suspended') return 'change-terms'
  throw refusal([
    wrongState('edit', state, [...PERMIT_RULES.edit.from, ...PERMIT_RULES['change-terms'].from]),
  ])
}

/**
 * Does something to a permit.
 *
 * @returns where it stands now
 * @throws DomainError with every reason at once: forbidden (another person has to do it; written to the record),
 *   not-acceptable-now (state or conditions), bad-input (what was typed), conflict (changed since it was read: says who
 *   did what), not-found, signature-refused
 */
export async function actOnPermit(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  form: PermitActForm,
): Promise<{ revision: number; state: PermitState }> {
  demand(actor, 'permit:stop')
  await noteDue(db, now, number)
  const subject = {
    meaning: `${form.act.replaceAll('-', ' ')} (heated-segment permit)`,
    ...subjectOf(number),
  }
  const signed = PERMIT_RULES[form.act].signed ? await takeSignature(db, actor, now, form, subject) : null
  return tx(db, async (inside) => {
    const permit = await currentPermit(inside, number, form.revision)
    const step = await judge(inside, actor, now, permit, form)
    const signature =
      signed === null ? null : await spendSignature(inside, signed, { actor, now, ...subject })
    await carryOut(inside, permit, step, { actor, now, signedActId: signature?.id ?? null })
    return { revision: permit.revision + 1, state: step.to }
  })
}

/** Judged before the signature, so that nobody signs what cannot be; it is judged again inside, where it counts. */
async function takeSignature(
  db: Db,
  actor: Actor,
  now: Date,
  form: PermitActForm,
  subject: SignedSubject,
): Promise<SignedAct> {
  const number = subject.subjectId
  const seen = await existing(db, number)
  await refuseStale(db, seen, form.revision)
  try {
    await judge(db, actor, now, seen, form)
  } catch (error) {
    await noteBlocked(db, actor, now, number, form, error)
    throw error
  }
  return signAct(db, { actor, password: demandPassword(form.password), now, ...subject })
}

function demandPassword(password: string): string {
  if (password !== '') return password
  throw new DomainError('signature-refused', 'This is signed: give your own password.', {
    fields: { password: ['Sign with your own password.'] },
  })
}

async function judge(
  db: DbOrTx,
  actor: Actor,
  now: Date,
  permit: PermitRow,
  form: PermitActForm,
): Promise<PermitStep> {
  const facts = await readPermitFacts(db, permit, now, { act: form.act, windowTo: endOf(permit, form) })
  const outcome = permitStep(facts, await permitActor(db, actor, now), form.act, form, now)
  if (outcome.kind === 'step') return outcome
  const others =
    form.act === 'approve' && outcome.reasons.some(({ kind }) => kind === 'person')
      ? (await officersApart(db, facts, now)).filter((name) => name !== actor.name)
      : []
  throw refusal(outcome.reasons, others)
}

/** An extension is held against what stands on the line until its new end. */
function endOf({ windowTo }: PermitRow, { act, detail }: PermitActForm): Date | null {
  if (act !== 'extend' || windowTo === null) return windowTo
  const asked = PERMIT_ACT_DETAILS.extend.safeParse(detail)
  return asked.success ? new Date(windowTo.getTime() + asked.data.hours * HOUR_MS) : windowTo
}

/** Refusals of signed acts that are about the person are kept, whatever became of the act's own transaction. */
async function noteBlocked(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  form: PermitActForm,
  error: unknown,
): Promise<void> {
  if (!(error instanceof DomainError) || error.code !== 'forbidden') return
  await writeRecord(db, {
    at: now,
    actor,
    act: 'permit attempt blocked',
    ...subjectOf(number),
    after: { attempt: form.act, reasons: error.details.persons },
  })
}

/**
 * What the product does because a time has passed: it takes effect when the time passed, and is recorded now.
 *
 * @throws DomainError not-found; conflict when it is not due, or not at that time, or done already
 */
export async function productAct(
  db: Db,
  now: Date,
  number: string,
  act: 'expire' | 'lapse',
  { at }: { at: Date },
): Promise<void> {
  await tx(db, async (inside) => {
    const permit = await lockPermit(inside, number)
    if (permit === null) throw notFound(number)
    const due = dueAct(permit, now)
    const outcome =
      due?.act === act && due.at.getTime() === at.getTime()
        ? productStep(await readPermitFacts(inside, permit, now, { act }), act, now)
        : null
    if (outcome === null || outcome.kind === 'refused') {
      throw new DomainError(
        'conflict',
        `Time does nothing to ${number} now: it is ${PERMIT_STATE_LABELS[permit.state].toLowerCase()}.`,
      )
    }
    await carryOut(inside, permit, outcome, { actor: null, now })
  })
}

/** Writes down what time has done, before a person's act is judged. */
async function noteDue(db: Db, now: Date, number: string): Promise<void> {
  const due = dueAct(await existing(db, number), now)
  if (due === null) return
  try {
    await productAct(db, now, number, due.act, { at: due.at })
  } catch (error) {
    // The worker was first, or somebody's act; what follows reads the permit anew.
    if (!(error instanceof DomainError && error.code === 'conflict')) throw error
  }
}

async function carryOut(
  inside: DbOrTx,
  permit: PermitRow,
  step: PermitStep,
  by: {
    actor: Actor | null
    now: Date
    version?: number
    planId?: number | null
    signedActId?: number | null
  },
): Promise<void> {
  const version = by.version ?? permit.version
  const change = {
    state: step.to,
    version,
    ...(by.planId === undefined ? {} : { planId: by.planId }),
    ...rowChange(permit, step),
  }
  if (!(await updatePermit(inside, permit.id, permit, change))) {
    throw new DomainError('conflict', `${permit.number} was changed at the same moment. Look at it again.`)
  }
  const { actor, now, signedActId = null } = by
  await insertPermitAct(inside, {
    permitId: permit.id,
    act: step.act,
    fromState: step.from,
    toState: step.to,
    revision: permit.revision + 1,
    version,
    at: step.at,
    recordedAt: now,
    personId: actor?.personId ?? null,
    reason: step.reason,
    detail: step.detail,
    signedActId,
  })
  await writeRecord(inside, {
    at: now,
    actor,
    act: `permit: ${step.act.replaceAll('-', ' ')}`,
    ...subjectOf(permit.number),
    effectiveAt: step.at,
    before: { state: step.from, revision: permit.revision, version: permit.version },
    after: { state: step.to, revision: permit.revision + 1, version, ...step.detail },
    reason: step.reason,
    signedActId,
  })
  await noteDangers(inside, permit.number, now)
}

type RowChange = Parameters<typeof updatePermit>[3]

function rowChange(permit: PermitRow, { effects, at }: PermitStep): RowChange {
  const change: RowChange = {}
  for (const effect of effects) Object.assign(change, columnsOfEffect(permit, effect, at))
  return change
}

function columnsOfEffect(permit: PermitRow, effect: PermitEffect, at: Date): RowChange {
  switch (effect.kind) {
    case 'set-requester':
      return { requestedBy: effect.personId, requestedAt: at }
    case 'approve':
      return { approvedBy: effect.personId, approvedAt: at, approvedVersion: permit.version }
    case 'void-approval':
      return { approvedBy: null, approvedAt: null }
    case 'set-window':
      return { windowFrom: effect.from, windowTo: effect.to }
    case 'set-current-until':
      return { currentUntil: effect.at }
    case 'set-holder':
      return { holderId: effect.personId }
    case 'count-extension':
      return {
        extensions: permit.extensions + 1,
        extendedHours: permit.extendedHours + effect.hours,
      }
    case 'end':
      return { endedAt: at }
    case 'safety-event':
      // Found with every other danger of the permit, once the act is written down.
      return {}
  }
}

const CODE_BY_KIND: readonly (readonly [Reason['kind'], ErrorCode])[] = [
  ['person', 'forbidden'],
  ['state', 'not-acceptable-now'],
  ['condition', 'not-acceptable-now'],
  ['input', 'bad-input'],
]

/** Every reason at once: those of a field beside it, the others together. */
function refusal(reasons: readonly Reason[], others: readonly string[] = []): DomainError {
  const code = CODE_BY_KIND.find(([kind]) => reasons.some((each) => each.kind === kind))?.[1] ?? 'conflict'
  const fields: Record<string, string[]> = {}
  for (const { field = 'form', text } of reasons) fields[field] = [...(fields[field] ?? []), text]
  const count = reasons.length === 1 ? 'One thing stands' : `${reasons.length} things stand`
  const ask = others.length === 0 ? '' : ` You can ask ${others.join(' or ')}.`
  return new DomainError(code, `${count} in the way; nothing has been changed.${ask}`, {
    fields,
    details: { reasons, persons: reasons.filter(({ kind }) => kind === 'person') },
  })
}

function subjectOf(number: string) {
  return { subjectKind: 'permit', subjectId: number }
}

function notFound(number: string): DomainError {
  return new DomainError('not-found', `There is no permit ${number}.`)
}

async function existing(db: DbOrTx, number: string): Promise<PermitRow> {
  const permit = await findPermit(db, number)
  if (permit === null) throw notFound(number)
  return permit
}

async function currentPermit(inside: DbOrTx, number: string, revision: number): Promise<PermitRow> {
  const permit = await lockPermit(inside, number)
  if (permit === null) throw notFound(number)
  await refuseStale(inside, permit, revision)
  return permit
}

/** Refuses what was decided on a page that is no longer true, and says what has happened since. */
async function refuseStale(db: DbOrTx, permit: PermitRow, revision: number): Promise<void> {
  if (permit.revision === revision) return
  const when = await instantWriter(db)
  const since = (await listPermitActs(db, permit.id)).filter((act) => act.revision > revision)
  const told = since.map(({ act, personName, at, toState }) => {
    const who = personName ?? 'the product, because a time had passed'
    return `${when(at)}: ${act.replaceAll('-', ' ')} by ${who}; it was then ${PERMIT_STATE_LABELS[toState].toLowerCase()}.`
  })
  throw new DomainError(
    'conflict',
    'This permit has changed since you opened it. Nothing of yours has been saved: look at it again and repeat what still fits.',
    { fields: { form: told }, details: { revision: permit.revision } },
  )
}
