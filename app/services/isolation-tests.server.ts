/**
 * Isolation tests on record: whoever ran one records it, an engineer accepts or voids it with a remark and a signature.
 * Nothing is deleted; a test that says nothing is voided, also after it was accepted.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  findIsolationTest,
  type IsolationTestRow,
  insertIsolationTest,
  lastAcceptedTest,
  listIsolationTests,
  updateIsolationTest,
} from '../db/queries/isolation-tests.server.ts'
import { listStates } from '../db/queries/segments.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'
import { againstLimit, lastOpened, usualWindow } from '../domain/isolation-tests.ts'
import type { IsolationDecision } from '../domain/schemas/isolation-test.ts'
import {
  fitWindow,
  type IsolationSubject,
  type IsolationWindow,
  type RiseCurve,
  readRise,
  readSubject,
  type WindowAnswer,
} from './isolation-tests-fit.server.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'
import { getSite } from './site.server.ts'

export type { IsolationTestRow }

const SHOWN = 20
const HOUR_MS = 3_600_000

export interface IsolationDraft {
  tag: string
  volumeM3: number
  limitPaPerHour: number | null
  gauges: { tag: string; label: string }[]
  /** What was asked, or what the page proposes. */
  window: IsolationWindow & { gauge: string }
  /** Whether a state says that the segment is or was isolated from `closedAt` on. */
  stateSaysIsolated: boolean
  answer: WindowAnswer | null
  curve: RiseCurve
}

/**
 * What the form of a new test shows: the window asked for, or the last isolation that the states know of, with its fit.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readIsolationDraft(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  asked: (IsolationWindow & { gauge: string }) | null,
): Promise<IsolationDraft> {
  demand(actor, 'isolation-test:record')
  const subject = await readSubject(db, tag, now)
  const window = asked ?? proposed(subject, now)
  const gauge = subject.gauges.find((each) => each.tag === window.gauge)
  const isolated = subject.states.find(({ state }) => state === 'isolated-test')
  return {
    tag,
    volumeM3: subject.volumeM3,
    limitPaPerHour: subject.limitPaPerHour,
    gauges: subject.gauges.map(({ tag: each, label }) => ({ tag: each, label })),
    window,
    stateSaysIsolated: isolated !== undefined,
    answer: gauge === undefined ? null : await fitWindow(db, subject, gauge, window),
    curve:
      gauge === undefined ? { points: [], opening: null } : await readRise(db, subject, gauge, window, now),
  }
}

function proposed({ states, gauges }: IsolationSubject, now: Date): IsolationWindow & { gauge: string } {
  const isolated = states.find(({ state }) => state === 'isolated-test')
  const closedAt = isolated?.since ?? new Date(now.getTime() - 12 * HOUR_MS)
  // The state's end is the opening itself; the fit stops the minute before.
  const end = isolated?.endedAt == null ? now : new Date(isolated.endedAt.getTime() - 60_000)
  const { from, to } = usualWindow(closedAt, end)
  const cross = gauges.find(({ tag }) => tag.endsWith('B')) ?? gauges[0]
  return { gauge: cross?.tag ?? '', closedAt, fitFrom: from, fitTo: to }
}

/**
 * Records a test: the fit of its window is made anew and kept with it.
 *
 * @returns the test's id
 * @throws DomainError forbidden, not-found, bad-input, not-acceptable-now (the window cannot be fitted, no limit is set)
 */
export async function recordIsolationTest(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  form: IsolationWindow & { gauge: string; note: string },
): Promise<number> {
  demand(actor, 'isolation-test:record')
  const subject = await readSubject(db, tag, now)
  const gauge = subject.gauges.find((each) => each.tag === form.gauge)
  if (gauge === undefined) {
    throw fieldError('gauge', `${tag} has no hot-cathode gauge ${form.gauge}. Choose one from the list.`)
  }
  if (form.fitTo > now) throw fieldError('fitTo', 'This lies in the future; there are no readings yet.')
  if (subject.limitPaPerHour === null) {
    throw new DomainError(
      'not-acceptable-now',
      `No limit for the rise of pressure of ${tag} is in force. An engineer sets one in the register; a test without a limit would say nothing.`,
    )
  }
  const answer = await fitWindow(db, subject, gauge, form)
  if (answer.kind === 'refused') {
    const { timeZone } = await getSite(db)
    const opened =
      answer.opening === null
        ? ''
        : ` It ends at ${instantText(answer.opening.at, timeZone)}: ${answer.opening.what}.`
    throw new DomainError('not-acceptable-now', `${answer.message}${opened} Nothing has been recorded.`, {
      fields: { fitTo: [answer.message] },
    })
  }
  const { finding } = answer
  const limitPaPerHour = subject.limitPaPerHour
  return tx(db, async (inside) => {
    const id = await insertIsolationTest(inside, {
      segmentId: subject.segment.id,
      positionId: gauge.id,
      state: 'recorded',
      closedAt: form.closedAt,
      fitFrom: form.fitFrom,
      fitTo: form.fitTo,
      limitPaPerHour,
      result: finding,
      note: form.note,
      recordedBy: actor.personId,
      recordedAt: now,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'isolation test recorded',
      subjectKind: 'isolation-test',
      subjectId: String(id),
      effectiveAt: form.closedAt,
      after: {
        segment: tag,
        gauge: gauge.tag,
        ratePaPerHour: finding.ratePaPerHour,
        limitPaPerHour,
        note: form.note,
      },
    })
    return id
  })
}

export interface IsolationTestDetail {
  test: IsolationTestRow
  curve: RiseCurve
  /** Whether the segment has been opened since, which takes its meaning from an accepted test. */
  openedSince: Date | null
}

/** One test of a segment with its curve. @throws DomainError forbidden, not-found */
export async function readIsolationTest(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  id: number,
): Promise<IsolationTestDetail> {
  demand(actor, 'facility:view')
  const test = await existing(db, tag, id)
  const subject = await readSubject(db, tag, now)
  const gauge = subject.gauges.find((each) => each.id === test.positionId)
  const opened = lastOpened(subject.states, now)
  return {
    test,
    curve:
      gauge === undefined
        ? { points: [], opening: null }
        : await readRise(db, subject, gauge, { ...test }, now),
    openedSince: opened !== null && opened > test.closedAt ? opened : null,
  }
}

async function existing(db: DbOrTx, tag: string, id: number): Promise<IsolationTestRow> {
  const test = Number.isSafeInteger(id) && id > 0 ? await findIsolationTest(db, id) : null
  if (test === null || test.segmentTag !== tag) {
    throw new DomainError('not-found', `${tag} has no isolation test of this number.`)
  }
  return test
}

/**
 * Accepts or voids a test, signed. Accepting takes a recorded one; voiding takes any that is not voided yet.
 *
 * @throws DomainError forbidden, not-found, bad-input, conflict (somebody else was first), signature-refused
 */
export async function decideIsolationTest(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  id: number,
  decision: IsolationDecision,
): Promise<void> {
  demand(actor, 'isolation-test:accept')
  const seen = await existing(db, tag, id)
  requireOpenTo(seen, decision)
  const accepts = decision.intent === 'accept'
  const subject = {
    meaning: accepts ? 'accept an isolation test' : 'void an isolation test',
    subjectKind: 'isolation-test',
    subjectId: String(id),
  }
  const signed = await signAct(db, { actor, password: decision.password, now, ...subject })
  await tx(db, async (inside) => {
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const done = { by: actor.personId, at: now, remark: decision.remark, signedActId: act.id }
    const changed = await updateIsolationTest(
      inside,
      { id, revision: decision.revision },
      accepts
        ? {
            state: 'accepted',
            acceptedBy: done.by,
            acceptedAt: done.at,
            acceptRemark: done.remark,
            acceptSignedActId: done.signedActId,
          }
        : {
            state: 'voided',
            voidedBy: done.by,
            voidedAt: done.at,
            voidRemark: done.remark,
            voidSignedActId: done.signedActId,
          },
    )
    if (!changed) throw overtaken(await existing(inside, tag, id))
    await writeRecord(inside, {
      at: now,
      actor,
      act: accepts ? 'isolation test accepted' : 'isolation test voided',
      subjectKind: 'isolation-test',
      subjectId: String(id),
      before: { state: seen.state },
      after: { state: accepts ? 'accepted' : 'voided', segment: tag },
      reason: decision.remark,
      signedActId: act.id,
    })
  })
}

function requireOpenTo(test: IsolationTestRow, decision: IsolationDecision): void {
  if (test.revision !== decision.revision) throw overtaken(test)
  if (test.state === 'voided') {
    throw new DomainError('conflict', 'This test is voided already, and stays so. Record a new one instead.')
  }
  if (decision.intent === 'void') return
  if (test.state === 'accepted') throw new DomainError('conflict', 'This test is accepted already.')
  if (againstLimit(test.finding, test.limitPaPerHour) !== 'within' && !decision.knowingly) {
    throw fieldError(
      'knowingly',
      'The rise is not clearly within its limit. If it is to be accepted all the same, tick this and say why in the remark.',
    )
  }
}

function overtaken(test: IsolationTestRow): DomainError {
  const by = test.voidedByName ?? test.acceptedByName ?? test.recordedByName
  return new DomainError(
    'conflict',
    `This test has changed since the page was loaded: it is now ${test.state} (${by}). Look again before you sign.`,
  )
}

function fieldError(name: string, message: string): DomainError {
  return new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
    fields: { [name]: [message] },
  })
}

/** Tests of a segment, the last first. */
export function isolationTestsOf(db: DbOrTx, segmentId: number): Promise<IsolationTestRow[]> {
  return listIsolationTests(db, segmentId, SHOWN)
}

/**
 * The accepted isolation test that holds for a segment: the last one accepted and not voided whose valve was closed
 * since the segment was last opened.
 *
 * @param at states after this instant are not counted
 * @returns null when there is none
 */
export async function acceptedIsolationTest(
  db: DbOrTx,
  segmentId: number,
  at: Date,
): Promise<IsolationTestRow | null> {
  const states = await listStates(db, segmentId)
  return lastAcceptedTest(db, segmentId, lastOpened(states, at))
}
