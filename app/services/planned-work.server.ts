/** Planning work in the tunnel, an officer's limits on it, and its beginning and end. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  findPlannedWork,
  insertPlannedWork,
  lockPlannedWork,
  type PlannedWorkRow,
  updatePlannedWork,
} from '../db/queries/planned-work.server.ts'
import { listLines, listSegments } from '../db/queries/segments.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { stretchText } from '../domain/permit-conflicts/words.ts'
import {
  limitFault,
  OPEN_WORK,
  PLANNED_WORK_STATE_LABELS,
  standsInTheWay,
  type WorkClash,
} from '../domain/planned-work.ts'
import type { PlannedWorkForm, WorkAct } from '../domain/schemas/planned-work.ts'
import { askedStretch, workFact } from './permit-conflicts-facts.server.ts'
import { clashesOf, closuresOf, readHeatingForWorks } from './planned-work-clashes.server.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'
import { instantWriter } from './site.server.ts'

/**
 * Enters a piece of work.
 *
 * @returns its number
 * @throws DomainError forbidden, bad-input (no such place, a stretch outside it, over already)
 */
export async function planWork(db: Db, actor: Actor, now: Date, form: PlannedWorkForm): Promise<number> {
  demand(actor, 'work:plan')
  const row = await rowOf(db, form, now)
  return tx(db, async (inside) => {
    const id = await insertPlannedWork(inside, {
      ...row,
      state: 'planned',
      createdBy: actor.personId,
      createdAt: now,
    })
    await writeRecord(inside, { at: now, actor, act: 'work planned', ...subjectOf(id), after: row })
    return id
  })
}

/**
 * Changes a piece of work that has not begun. What an officer ruled was about the other, so that is gone.
 *
 * @returns whether a ruling went with it
 * @throws DomainError forbidden, not-found, conflict, not-acceptable-now, bad-input
 */
export async function changeWork(
  db: Db,
  actor: Actor,
  now: Date,
  id: number,
  form: PlannedWorkForm & { revision: number; reason: string },
): Promise<{ wasLimited: boolean }> {
  demand(actor, 'work:plan')
  const { revision, reason, ...wanted } = form
  const row = await rowOf(db, wanted, now)
  return tx(db, async (inside) => {
    const before = await openWork(inside, id, revision)
    await change(inside, before, { ...row, state: 'planned', ...NO_RULING })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'work changed',
      ...subjectOf(id),
      before: factsOf(before),
      after: row,
      reason,
    })
    return { wasLimited: before.state === 'limited' }
  })
}

const NO_RULING = {
  limitedFromM: null,
  limitedToM: null,
  barrier: '',
  ruling: '',
  ruledBy: null,
  ruledAt: null,
  signedActId: null,
}

/** What a form says, as it is stored. A place that the register does not know, or a stretch outside it, is refused. */
async function rowOf(db: DbOrTx, form: PlannedWorkForm, now: Date) {
  if (form.endsAt <= now) throw fieldFault({ endsAt: 'This is over already. Plan what is to come.' })
  const { kind, title, fromM, toM, startsAt, endsAt, people, note } = form
  const [what, code] = form.place.split(':')
  const row = { kind, title, fromM, toM, startsAt, endsAt, people, note, lineId: null, segmentId: null }
  if (what === 'segment') {
    const found = (await listSegments(db, now)).find(({ tag }) => tag === code)
    if (found === undefined) throw fieldFault({ place: `The register has no segment ${code}.` })
    requireInside(form, { fromM: found.startM, toM: found.endM }, found.tag)
    return { ...row, segmentId: found.id }
  }
  if (what === 'line') {
    const found = (await listLines(db)).find((line) => line.code === code)
    if (found === undefined) throw fieldFault({ place: `The register has no line ${code}.` })
    requireInside(form, { fromM: 0, toM: found.lengthM }, found.name)
    return { ...row, lineId: found.id }
  }
  return row
}

function requireInside(
  { fromM, toM }: Pick<PlannedWorkForm, 'fromM' | 'toM'>,
  whole: { fromM: number; toM: number },
  name: string,
): void {
  const words = `${name} lies at ${stretchText(whole)}.`
  if (fromM !== null && (fromM < whole.fromM || fromM > whole.toM)) throw fieldFault({ fromM: words })
  if (toM !== null && (toM < whole.fromM || toM > whole.toM)) throw fieldFault({ toM: words })
}

/**
 * Does something with a piece of work.
 *
 * @returns what has been done, as a sentence
 * @throws DomainError forbidden (no permission; an officer's own work), not-found, conflict, not-acceptable-now (with
 *   everything that stands in the way), bad-input, signature-refused
 */
export async function actOnWork(db: Db, actor: Actor, now: Date, id: number, act: WorkAct): Promise<string> {
  switch (act.act) {
    case 'limit':
    case 'refuse':
      return ruleOnWork(db, actor, now, id, act)
    case 'start':
      return startWork(db, actor, now, id, act.revision)
    case 'finish':
      return finishWork(db, actor, now, id, act)
    case 'call-off':
      return callOffWork(db, actor, now, id, act)
  }
}

type Ruling = Extract<WorkAct, { act: 'limit' | 'refuse' }>

/** An officer leaves a stretch of it with a barrier, or nothing; signed. Nobody rules on work of their own. */
async function ruleOnWork(db: Db, actor: Actor, now: Date, id: number, form: Ruling): Promise<string> {
  demand(actor, 'permit:approve')
  await requireRulable(db, actor, now, await existing(db, id), form)
  const subject = {
    meaning: form.act === 'limit' ? 'limit planned work' : 'refuse planned work',
    ...subjectOf(id),
  }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const work = await openWork(inside, id, form.revision)
    await requireRulable(inside, actor, now, work, form)
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const ruled = {
      ...NO_RULING,
      state: form.act === 'limit' ? ('limited' as const) : ('refused' as const),
      ruling: form.ruling,
      ...(form.act === 'limit'
        ? { limitedFromM: form.fromM, limitedToM: form.toM, barrier: form.barrier }
        : {}),
    }
    await change(inside, work, {
      ...ruled,
      ruledBy: actor.personId,
      ruledAt: now,
      signedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: form.act === 'limit' ? 'work limited' : 'work refused',
      ...subjectOf(id),
      before: factsOf(work),
      after: ruled,
      reason: form.ruling.slice(0, 1000),
      signedActId: act.id,
    })
  })
  return form.act === 'limit'
    ? `Limited to ${stretchText(form)}.`
    : 'Refused. Whoever planned it can plan another.'
}

async function requireRulable(
  db: DbOrTx,
  actor: Actor,
  now: Date,
  work: PlannedWorkRow,
  form: Ruling,
): Promise<void> {
  requireRevision(work, form.revision)
  requireOpen(work)
  if (work.createdBy === actor.personId) {
    throw new DomainError('forbidden', 'You planned this work, so another safety officer has to rule on it.')
  }
  if (form.act === 'refuse') return
  const asked = askedStretch(work)
  if (asked === null) {
    throw new DomainError(
      'not-acceptable-now',
      'This work names no stretch that could be limited. Have it changed to name one, or refuse it.',
    )
  }
  const fault = limitFault(asked, form)
  if (fault !== null) throw fieldFault({ fromM: fault })
  const left = { ...workFact(work), stretch: { line: asked.line, fromM: form.fromM, toM: form.toM } }
  const still = clashesOf(left, await readHeatingForWorks(db, now)).filter(standsInTheWay)
  if (still.length > 0) {
    throw new DomainError(
      'not-acceptable-now',
      `${stretchText(form)} would still meet what this ruling is to keep apart. Leave less of it, rule on the permit’s conflict, or refuse it.`,
      { fields: { form: still.map(reasonOf) } },
    )
  }
}

function reasonOf({ permit, rule, text, wayOut }: WorkClash): string {
  return `${permit === null ? '' : `${permit}, `}${rule}: ${text} ${wayOut}`
}

/** Begins it, if nothing stands in the way now: no heat without a ruling, no closed bay, within its time. */
async function startWork(db: Db, actor: Actor, now: Date, id: number, revision: number): Promise<string> {
  demand(actor, 'work:plan')
  await tx(db, async (inside) => {
    const work = await openWork(inside, id, revision)
    const reasons = await whyNotStart(inside, now, work)
    if (reasons.length > 0) {
      throw new DomainError(
        'not-acceptable-now',
        reasons.length === 1
          ? 'This work cannot begin; one thing stands in its way:'
          : `This work cannot begin; ${reasons.length} things stand in its way:`,
        { fields: { form: reasons } },
      )
    }
    await change(inside, work, { state: 'started' })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'work started',
      ...subjectOf(id),
      before: { state: work.state },
      after: { state: 'started' },
    })
  })
  return 'Under way. Say when it is finished.'
}

async function whyNotStart(db: DbOrTx, now: Date, work: PlannedWorkRow): Promise<string[]> {
  const when = await instantWriter(db)
  const early = `It is planned from ${when(work.startsAt)}. Change its times if it is to begin sooner, so that they are compared with the permits.`
  const late = `Its time was over at ${when(work.endsAt)}. Give it a new time first.`
  const heating = await readHeatingForWorks(db, now)
  const fact = workFact(work)
  return [
    ...(now < work.startsAt ? [early] : []),
    ...(now >= work.endsAt ? [late] : []),
    ...closuresOf(fact, heating).map(
      ({ line, fromM, toM, closedAt, reason }) =>
        `${line}, ${stretchText({ fromM, toM })} has been closed since ${when(closedAt)}: ${reason} Nobody goes in until a safety officer has released it under Permits, Closed bays.`,
    ),
    ...clashesOf(fact, heating).filter(standsInTheWay).map(reasonOf),
  ]
}

async function finishWork(
  db: Db,
  actor: Actor,
  now: Date,
  id: number,
  form: { revision: number; note: string },
): Promise<string> {
  demand(actor, 'work:plan')
  await tx(db, async (inside) => {
    const work = await lockedWork(inside, id, form.revision)
    if (work.state !== 'started') throw wrongState(work, 'Only work that is under way can be finished.')
    const note = [work.note, form.note].filter((part) => part !== '').join('\n')
    await change(inside, work, { state: 'finished', note: note.slice(0, 1000) })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'work finished',
      ...subjectOf(id),
      before: { state: work.state },
      after: { state: 'finished' },
      reason: form.note,
    })
  })
  return 'Finished.'
}

async function callOffWork(
  db: Db,
  actor: Actor,
  now: Date,
  id: number,
  form: { revision: number; reason: string },
): Promise<string> {
  demand(actor, 'work:plan')
  await tx(db, async (inside) => {
    const work = await openWork(inside, id, form.revision)
    await change(inside, work, { state: 'called-off' })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'work called off',
      ...subjectOf(id),
      before: { state: work.state },
      after: { state: 'called-off' },
      reason: form.reason,
    })
  })
  return 'Called off.'
}

function subjectOf(id: number) {
  return { subjectKind: 'planned-work', subjectId: String(id) }
}

function factsOf({
  kind,
  title,
  state,
  segmentTag,
  lineCode,
  fromM,
  toM,
  startsAt,
  endsAt,
  people,
}: PlannedWorkRow) {
  return { kind, title, state, segment: segmentTag, line: lineCode, fromM, toM, startsAt, endsAt, people }
}

async function existing(db: DbOrTx, id: number): Promise<PlannedWorkRow> {
  const work = Number.isSafeInteger(id) ? await findPlannedWork(db, id) : null
  if (work !== null) return work
  throw new DomainError('not-found', 'There is no such work. Permits, Works lists what there is.')
}

async function lockedWork(inside: DbOrTx, id: number, revision: number): Promise<PlannedWorkRow> {
  const work = Number.isSafeInteger(id) ? await lockPlannedWork(inside, id) : null
  if (work === null) throw new DomainError('not-found', 'There is no such work.')
  requireRevision(work, revision)
  return work
}

async function openWork(inside: DbOrTx, id: number, revision: number): Promise<PlannedWorkRow> {
  const work = await lockedWork(inside, id, revision)
  requireOpen(work)
  return work
}

function requireRevision(work: PlannedWorkRow, revision: number): void {
  if (work.revision === revision) return
  const ruled = work.ruledByName === null ? '' : `; ${work.ruledByName} ruled on it last`
  throw new DomainError(
    'conflict',
    `This work has changed since the page was loaded: it is now “${PLANNED_WORK_STATE_LABELS[work.state].toLowerCase()}”${ruled}. Look again; nothing of yours has been saved.`,
  )
}

function requireOpen(work: PlannedWorkRow): void {
  if (!OPEN_WORK.includes(work.state)) {
    throw wrongState(work, 'Only work that is still to come can be changed, ruled on, begun or called off.')
  }
}

function wrongState(work: PlannedWorkRow, rule: string): DomainError {
  return new DomainError(
    'not-acceptable-now',
    `This work is ${PLANNED_WORK_STATE_LABELS[work.state].toLowerCase()}. ${rule}`,
  )
}

async function change(
  inside: DbOrTx,
  work: PlannedWorkRow,
  values: Parameters<typeof updatePlannedWork>[3],
): Promise<void> {
  if (await updatePlannedWork(inside, work.id, work.revision, values)) return
  throw new DomainError('conflict', 'Somebody has changed this work at the same moment. Look again.')
}
