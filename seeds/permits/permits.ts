/**
 * The permits of the demo with their whole histories: versions, acts, locks, tests and rounds, written as they would
 * stand if people had used the product for fourteen months. All of it is invented, its signatures too.
 */
import { max } from 'drizzle-orm'
import type { DbOrTx } from '../../app/db/client.server.ts'
import {
  bakePlan,
  boxLock,
  heatingStatement,
  isolationPoint,
  lockInUse,
  permit,
  permitAct,
  permitRound,
  permitRuling,
  permitSegment,
  permitTest,
  permitVersion,
  safetyEvent,
  signedAct,
} from '../../app/db/schema/index.ts'
import { type PermitContent, PermitContentSchema } from '../../app/domain/permit-content.ts'
import type { PermitAct } from '../../app/domain/permit-words.ts'
import { PERMIT_RULES } from '../../app/domain/permits.ts'
import { PERSON_ID } from '../people.ts'
import { pick } from '../readings/noise.ts'
import { segmentOf } from '../register/segments.ts'
import { type DemoPermit, PERMITS } from '../scenario/permits.ts'
import { begunAt, type DemoAct, historyOf, type PermitHistory } from './acts.ts'
import { roundRows, testRows } from './checks.ts'
import { beforeReturn, contentOf } from './content.ts'
import { eventRows, statementRows } from './events.ts'
import { jobOf } from './jobs.ts'
import { addLocks, type LockRows } from './locks.ts'
import { rulingRows } from './rulings.ts'
import { type Signatures, signaturesAfter } from './signatures.ts'

/** Rows of one insert. */
const BLOCK = 400

type PlanOf = (demo: DemoPermit) => { id: number; version: number } | null

/** Everything about the demo's permits, table by table. */
export interface PermitTables {
  signatures: (typeof signedAct.$inferInsert)[]
  permits: (typeof permit.$inferInsert)[]
  segments: (typeof permitSegment.$inferInsert)[]
  versions: (typeof permitVersion.$inferInsert & { content: PermitContent })[]
  acts: (typeof permitAct.$inferInsert)[]
  locks: LockRows
  tests: (typeof permitTest.$inferInsert)[]
  rounds: (typeof permitRound.$inferInsert)[]
  rulings: (typeof permitRuling.$inferInsert)[]
}

/**
 * Rows of all permits.
 *
 * @param lastSignatureId the highest id of a signature that is taken
 * @param planOf the bake plan that a permit was drawn up from
 */
export function permitTables(lastSignatureId: number, planOf: PlanOf): PermitTables {
  const signatures = signaturesAfter(lastSignatureId)
  const begun = begunAt(PERMITS)
  const tables: PermitTables = {
    signatures: signatures.rows,
    permits: [],
    segments: [],
    versions: [],
    acts: [],
    locks: { points: [], inUse: [], boxes: [] },
    tests: [],
    rounds: [],
    rulings: [],
  }
  for (const [index, demo] of PERMITS.entries()) {
    const id = index + 1
    const history = historyOf(demo, begun[index] as Date)
    const content = PermitContentSchema.parse(contentOf(demo, planOf(demo)))
    tables.permits.push(permitRow(id, demo, history, content))
    tables.segments.push(...demo.segments.map((tag) => ({ permitId: id, segmentId: segmentOf(tag).id })))
    tables.versions.push(...versionRows(id, history, content))
    tables.acts.push(...history.acts.map((act) => actRow(id, demo, act, signatures)))
    addLocks(tables.locks, demo, id, history, signatures)
    tables.tests.push(...testRows(demo, id, history))
    tables.rounds.push(...roundRows(demo, id, history))
    tables.rulings.push(...rulingRows(demo, id, signatures))
  }
  return tables
}

/** Writes them. Bake plans and the register are there before; the tables of permits are empty. */
export async function seedPermits(db: DbOrTx): Promise<number> {
  const [taken] = await db.select({ id: max(signedAct.id) }).from(signedAct)
  const tables = permitTables(taken?.id ?? 0, await plansByPermit(db))
  await inBlocks(tables.signatures, (block) => db.insert(signedAct).values(block))
  await db.insert(permit).values(tables.permits)
  await db.insert(permitSegment).values(tables.segments)
  await inBlocks(tables.versions, (block) => db.insert(permitVersion).values(block))
  await inBlocks(tables.acts, (block) => db.insert(permitAct).values(block))
  await inBlocks(tables.locks.points, (block) => db.insert(isolationPoint).values(block))
  await db.insert(boxLock).values(tables.locks.boxes)
  await db.insert(lockInUse).values(tables.locks.inUse)
  await inBlocks(tables.tests, (block) => db.insert(permitTest).values(block))
  await inBlocks(tables.rounds, (block) => db.insert(permitRound).values(block))
  await db.insert(permitRuling).values(tables.rulings)
  await db.insert(safetyEvent).values(eventRows())
  await db.insert(heatingStatement).values(statementRows())
  return tables.permits.length
}

async function inBlocks<T>(rows: readonly T[], insert: (block: T[]) => Promise<unknown>): Promise<void> {
  for (let from = 0; from < rows.length; from += BLOCK) await insert(rows.slice(from, from + BLOCK))
}

/** Plans by the title that the demo gives them. */
async function plansByPermit(db: DbOrTx): Promise<PlanOf> {
  const rows = await db
    .select({ id: bakePlan.id, title: bakePlan.title, version: bakePlan.version })
    .from(bakePlan)
  return (demo) => {
    const { segments } = demo
    const ramp = jobOf(demo)?.bake?.rampAt
    const title =
      segments.length === 2
        ? `Series bake of ${segments.join(' and ')}`
        : ramp === undefined
          ? null
          : `Bake of ${segments[0]}, ${ramp.toISOString().slice(0, 7)}`
    return rows.find((row) => row.title === title) ?? null
  }
}

/** A short code of letters and figures that are not taken for one another. */
function shortCodeOf(number: string): string {
  const letters = [...'BCDFGHJKMPQRTVWXY346789']
  return Array.from({ length: 6 }, (_, index) => pick(letters, `${number}/${index}`)).join('')
}

function permitRow(
  id: number,
  demo: DemoPermit,
  { acts, currentUntil, acceptedAt }: PermitHistory,
  content: PermitContent,
): typeof permit.$inferInsert {
  const first = acts[0] as DemoAct
  const last = acts.at(-1) as DemoAct
  const lastOf = (act: PermitAct) => acts.findLast((one) => one.act === act)
  const requested = lastOf('request')
  const approved = lastOf('approve')
  const extended = acts.filter(({ act }) => act === 'extend')
  const ended = ['refused', 'cancelled', 'lapsed', 'withdrawn'].includes(demo.state)
  return {
    id,
    number: demo.number,
    shortCode: shortCodeOf(demo.number),
    state: last.toState,
    revision: last.revision,
    version: last.version,
    approvedVersion: approved?.version ?? null,
    planId: content.planId,
    createdBy: PERSON_ID[first.by ?? demo.requestedBy],
    createdAt: first.at,
    requestedBy: requested?.by == null ? null : PERSON_ID[requested.by],
    requestedAt: requested?.at ?? null,
    approvedBy: approved?.by == null ? null : PERSON_ID[approved.by],
    approvedAt: approved?.at ?? null,
    holderId: acceptedAt === null ? null : PERSON_ID[demo.holder],
    windowFrom: demo.window?.fromAt ?? null,
    windowTo: demo.window?.untilAt ?? null,
    currentUntil,
    extensions: extended.length,
    extendedHours: extended.reduce((sum, { detail }) => sum + (detail as { hours: number }).hours, 0),
    endedAt: ended ? last.at : null,
  }
}

function versionRows(
  permitId: number,
  { acts }: PermitHistory,
  content: PermitContent,
): PermitTables['versions'] {
  const [first] = acts as [DemoAct, ...DemoAct[]]
  const edit = acts.find(({ act }) => act === 'edit')
  const by = PERSON_ID[first.by ?? 'bram']
  if (edit === undefined) {
    return [{ permitId, version: 1, content, reason: 'First version', madeBy: by, madeAt: first.at }]
  }
  return [
    {
      permitId,
      version: 1,
      content: beforeReturn(content),
      reason: 'First version',
      madeBy: by,
      madeAt: first.at,
    },
    { permitId, version: 2, content, reason: edit.reason, madeBy: by, madeAt: edit.at },
  ]
}

function actRow(
  permitId: number,
  { number }: DemoPermit,
  { by, at: when, act, ...rest }: DemoAct,
  { sign }: Signatures,
): typeof permitAct.$inferInsert {
  return {
    permitId,
    act,
    ...rest,
    at: when,
    recordedAt: when,
    personId: by === null ? null : PERSON_ID[by],
    signedActId:
      by === null || !PERMIT_RULES[act].signed
        ? null
        : sign(by, when, `${act.replaceAll('-', ' ')} (heated-segment permit)`, {
            kind: 'permit',
            id: number,
          }),
  }
}
