/** Tests and rounds at a heated segment, written down by whoever took them or saw them taken. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { findSegments } from '../db/queries/heating.server.ts'
import {
  findTestInstrument,
  insertPermitRound,
  insertPermitTest,
  listPermitRounds,
  listPermitTests,
  type TestInstrument,
} from '../db/queries/permit-tests.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { LockPerson } from '../domain/isolation-locks.ts'
import type { RequiredTest } from '../domain/permit-content.ts'
import {
  answers,
  figureText,
  judgeTest,
  limitsOf,
  measures,
  needsInstrument,
  nextDue,
  notTakenText,
  outsideText,
  roundObjection,
  TEST_UNITS,
} from '../domain/permit-tests.ts'
import { PERMIT_TEST_LABELS } from '../domain/permit-words.ts'
import { WHAT_TO_DO } from '../domain/safety-events.ts'
import type { PermitRoundForm, PermitTestForm } from '../domain/schemas/permit-site.ts'
import { lockedPermit, lockPermitOf, permitOf } from './isolation-points.server.ts'
import { lockPersonOf } from './lock-people.server.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { noteDangers, reportOxygen } from './safety-events.server.ts'
import { instantWriter } from './site.server.ts'

const AHEAD_MS = 5 * 60_000
/** What was noted on paper is typed within the month (our own rule), as other readings are. */
const BACK_MS = 31 * 86_400_000

/** What became of a test: whether it passed, and one sentence for the person; for bad air what to do. */
export interface TestOutcome {
  passed: boolean
  /** The air is bad: everybody leaves. */
  leave: boolean
  text: string
}

/**
 * Writes a test down. One that does not count is written down too, with the reason: a bad reading is never refused for
 * want of a serial number.
 *
 * @throws DomainError forbidden, not-found, bad-input, not-acceptable-now (draft, or over)
 */
export async function recordPermitTest(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  form: PermitTestForm,
): Promise<TestOutcome> {
  demand(actor, 'permit:test')
  const permit = await permitOf(db, number)
  refuseState(permit, now)
  const when = await instantWriter(db)
  refuseTime('takenAt', form.takenAt, now, when)
  const by = await lockPersonOf(db, form.by, actor, now)
  const required = permit.content.tests.find((one) => answers(one, form)) ?? null
  const segment = await segmentOf(db, permit, form)
  const taken = await readTaken(db, form, required)
  const faults = {
    ...(by.signsIn && by.personId !== actor.personId
      ? { by: `${by.name} has a log-in and writes down their own tests. Ask ${by.name} to sign in here.` }
      : {}),
    // Somebody may be breathing this: it is written down as it is.
    ...(taken.alarming ? {} : taken.faults),
  }
  if (Object.keys(faults).length > 0) throw fieldFault(faults)
  const { value, unit, calibrationDue } = taken
  const judged = judgeTest(
    required,
    { kind: form.kind, value, unit, takenAt: form.takenAt, calibrationDue, saysPassed: form.says },
    when,
  )
  const why = [...judged.reasons, form.note].filter((text) => text !== '').join(' ')
  return tx(db, async (inside) => {
    await lockedPermit(inside, number)
    const place = required?.place ?? form.place
    const again = (await listPermitTests(inside, permit.id)).some(
      (test) =>
        test.kind === form.kind &&
        test.place === place &&
        test.value === value &&
        test.testerId === by.personId &&
        test.passed === judged.passed &&
        test.takenAt.getTime() === form.takenAt.getTime(),
    )
    if (again) {
      const text = 'This test was written down already. Nothing was added.'
      return { passed: judged.passed, leave: false, text }
    }
    await insertPermitTest(inside, {
      permitId: permit.id,
      kind: form.kind,
      place,
      value,
      unit,
      passed: judged.passed,
      instrumentSerial: taken.serial,
      calibrationDue,
      testerId: by.personId,
      witnessId: by.personId === actor.personId ? null : actor.personId,
      takenAt: form.takenAt,
      recordedBy: actor.personId,
      recordedAt: now,
      nextDueAt: judged.passed ? nextDue(required, form.takenAt) : null,
      note: why.slice(0, 500),
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'permit test recorded',
      subjectKind: 'permit',
      subjectId: number,
      effectiveAt: form.takenAt,
      after: {
        kind: form.kind,
        place,
        value,
        unit,
        passed: judged.passed,
        instrument: taken.serial,
        tester: by.name,
      },
      reason: why.slice(0, 1000),
    })
    const air = await reportAir(inside, { actor, now, permit, form, segment, taken, by, doubt: judged.doubt })
    await noteDangers(inside, number, now)
    const name = `${PERMIT_TEST_LABELS[form.kind]}${value === null ? '' : `, ${figureText(value, unit)}`}`
    if (air !== null) return { passed: false, leave: true, text: `${name}, written down. ${air}` }
    return judged.passed
      ? { passed: true, leave: false, text: `${name}: passed, written down.` }
      : {
          passed: false,
          leave: false,
          text: `${name}: written down, not passed. ${judged.reasons.join(' ')}`,
        }
  })
}

function refuseState(permit: PermitRow, now: Date): void {
  const refusal = notTakenText(permit.number, lockPermitOf(permit, now).state)
  if (refusal !== null) throw new DomainError('not-acceptable-now', refusal)
}

function refuseTime(field: string, at: Date, now: Date, when: (at: Date) => string): void {
  if (at.getTime() > now.getTime() + AHEAD_MS)
    throw fieldFault({ [field]: `Found ${when(at)}; expected now (${when(now)}) or earlier.` })
  if (at.getTime() < now.getTime() - BACK_MS)
    throw fieldFault({
      [field]: `Found ${when(at)}; expected a time within the last 31 days. Check the date.`,
    })
}

type Segment = Awaited<ReturnType<typeof findSegments>>[number]

/** The segment at which oxygen was read; null for other tests, which belong to the permit as a whole. */
async function segmentOf(db: DbOrTx, permit: PermitRow, form: PermitTestForm): Promise<Segment | null> {
  if (form.kind !== 'oxygen') return null
  const segments = await findSegments(db, permit.content.segments)
  const found = segments.length === 1 ? segments[0] : segments.find(({ tag }) => tag === form.segment)
  if (found !== undefined) return found
  throw fieldFault({
    segment: `Choose at which segment it was read: ${segments.map(({ tag }) => tag).join(' or ')}.`,
  })
}

interface Taken {
  value: number | null
  unit: string
  serial: string
  calibrationDue: Date | null
  faults: Record<string, string>
  /** Oxygen outside its limits. */
  alarming: boolean
}

async function readTaken(db: DbOrTx, form: PermitTestForm, required: RequiredTest | null): Promise<Taken> {
  const limits = limitsOf(form.kind, required)
  const unit =
    limits?.unit ?? (required === null || required.unit === '' ? TEST_UNITS[form.kind] : required.unit)
  const value = form.value ?? null
  const faults: Record<string, string> = {}
  if (value === null && (limits !== null || needsInstrument(form.kind))) {
    faults.value = `Type the figure that was read${unit === '' ? '' : `, in ${unit}`}.`
  }
  if (limits === null && form.says === null) faults.says = 'Say whether it passed or failed.'
  const known = form.instrument === '' ? null : await findTestInstrument(db, form.instrument)
  const calibrationDue = known?.calibrationDue ?? form.calibrationDue ?? null
  const instrument = instrumentFault(form, known)
  if (instrument !== null) faults.instrument = instrument
  else if (needsInstrument(form.kind) && calibrationDue === null) {
    faults.calibrationDue =
      known === null
        ? `The register has no ${form.instrument}. Check the serial number; or give the day until which it is calibrated, from its label.`
        : `The register does not say until when ${known.serial} is calibrated. Give the day from its label.`
  }
  const alarming =
    form.kind === 'oxygen' && value !== null && limits !== null && outsideText(limits, value, unit) !== null
  return { value, unit, serial: known?.serial ?? form.instrument, calibrationDue, faults, alarming }
}

function instrumentFault(form: PermitTestForm, known: TestInstrument | null): string | null {
  if (form.instrument === '') {
    return needsInstrument(form.kind)
      ? 'Type the serial number of the instrument that it was read from.'
      : null
  }
  if (known?.quantity == null || measures(form.kind, known.quantity)) return null
  return `${known.serial} reads ${known.quantity}. Type the instrument that was used for this test.`
}

/** Tells of oxygen. Gives what to do where the air is bad, else null. */
async function reportAir(
  inside: DbOrTx,
  one: {
    actor: Actor
    now: Date
    permit: PermitRow
    form: PermitTestForm
    segment: Segment | null
    taken: Taken
    by: LockPerson
    doubt: string
  },
): Promise<string | null> {
  const { segment, taken, form, by, permit } = one
  if (segment === null || taken.value === null) return null
  const instrument = taken.serial === '' ? 'an instrument without a serial number' : taken.serial
  const { answer } = await reportOxygen(
    inside,
    {
      lineId: segment.lineId,
      segmentId: segment.id,
      percent: taken.value,
      at: form.takenAt,
      actor: one.actor,
      permitId: permit.id,
      text: `${permit.number}${form.place === '' ? '' : `, ${form.place}`}, read with ${instrument} by ${by.name}`,
      place: form.place,
      instrument: taken.serial,
      tester: by.name,
      doubt: one.doubt,
    },
    one.now,
  )
  if (answer === 'good') return null
  return WHAT_TO_DO[answer === 'low' ? 'low-oxygen' : 'high-oxygen']
}

/**
 * Writes a round down.
 *
 * @throws DomainError forbidden, not-found, bad-input, not-acceptable-now (draft, or over)
 */
export async function recordPermitRound(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  form: PermitRoundForm,
): Promise<string> {
  demand(actor, 'permit:test')
  const permit = await permitOf(db, number)
  refuseState(permit, now)
  refuseTime('at', form.at, now, await instantWriter(db))
  const { hottestC, hottestAtM, inOrder, text } = form
  const objection = roundObjection(form, permit.content.maxCelsius)
  if (objection !== null) throw fieldFault({ [inOrder ? 'inOrder' : 'text']: objection })
  const again = await tx(db, async (inside) => {
    await lockedPermit(inside, number)
    const round = { hottestC, hottestAtM, inOrder, text }
    const there = (await listPermitRounds(inside, permit.id)).some(
      (each) =>
        each.personId === actor.personId &&
        each.at.getTime() === form.at.getTime() &&
        each.inOrder === inOrder &&
        each.hottestC === hottestC &&
        each.hottestAtM === hottestAtM &&
        each.text === text,
    )
    if (there) return true
    const who = { permitId: permit.id, personId: actor.personId }
    await insertPermitRound(inside, { ...round, ...who, at: form.at, recordedAt: now })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'permit round recorded',
      subjectKind: 'permit',
      subjectId: number,
      effectiveAt: form.at,
      after: round,
    })
    return false
  })
  if (again) return 'This round was written down already. Nothing was added.'
  return inOrder
    ? 'Round written down: in order.'
    : 'Round written down: not in order. If it goes on, suspend the permit.'
}
