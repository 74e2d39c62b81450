/** Bake plans of the demo: those of the bakes that ran to their end, those that run, and drafts of what is to come. */
import { eq } from 'drizzle-orm'
import type { DbOrTx } from '../../app/db/client.server.ts'
import {
  bakePlan,
  bakePlanCheck,
  bakePlanSegment,
  bakePlanVersion,
  signedAct,
} from '../../app/db/schema/index.ts'
import type { BakePlanContent } from '../../app/domain/bake-plan.ts'
import { TICKED_ITEM_KEYS, type TickedItem } from '../../app/domain/bake-plan-readiness.ts'
import type { BakePlanState, PlanPriority } from '../../app/domain/planning.ts'
import { predictFromRegister } from '../../app/services/bake-plans-facts.server.ts'
import { at } from '../demo-time.ts'
import { hoursAfter } from '../log/entry.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'
import { segmentOf } from '../register/segments.ts'
import { BAKES, type DemoBake } from '../scenario/bakes.ts'

const PLANNER = PERSON_ID.bram

/** The site's usual bake, as the limits of the register have it. */
const USUAL: Omit<BakePlanContent, 'segments' | 'startsAt' | 'supply' | 'cart' | 'remarks'> = {
  prepHours: 48,
  celsius: 150,
  upKH: 10,
  holdPa: 1e-2,
  abortPa: 0.1,
  spreadK: 20,
  soakHours: 168,
  soakEnd: { fallPercent: 10, waterBehind: true },
  cooling: { kind: 'natural' },
  pumpChangeC: 80,
  coldC: 40,
  testHours: 48,
  targetPa: 2e-7,
}

interface DemoPlan {
  title: string
  state: BakePlanState
  priority: PlanPriority
  versions: { content: BakePlanContent; reason: string; madeAt: Date }[]
  /** When it was signed as ready; null for a draft. */
  readyAt: Date | null
  closed: { at: Date; reason: string } | null
  ticks: { item: TickedItem; by: PersonKey; at: Date }[]
}

function planOf(bake: DemoBake): DemoPlan {
  const { segment, supply, cart, rampAt, prepAt, inServiceAt, lead, second } = bake
  const content: BakePlanContent = {
    ...USUAL,
    segments: [segment],
    startsAt: rampAt.toISOString(),
    prepHours: Math.round((rampAt.getTime() - prepAt.getTime()) / 3_600_000),
    supply,
    cart,
    remarks: '',
  }
  const readyAt = hoursAfter(prepAt, 26)
  return {
    title: `Bake of ${segment}, ${rampAt.toISOString().slice(0, 7)}`,
    state: inServiceAt === null ? 'under-way' : 'done',
    priority: 'normal',
    versions: [{ content, reason: 'First version', madeAt: hoursAfter(prepAt, -120) }],
    readyAt,
    closed:
      inServiceAt === null ? null : { at: inServiceAt, reason: 'Soak over, test passed, back in service' },
    ticks: TICKED_ITEM_KEYS.map((item, index) => ({
      item,
      by: index % 2 === 0 ? lead : second,
      at: hoursAfter(prepAt, 2 + 2 * index),
    })),
  }
}

/** The pair that comes next. SG-11 has no accepted isolation test, and the electrician's licence ends in the middle. */
function nextPair(): DemoPlan {
  const content: BakePlanContent = {
    ...USUAL,
    segments: ['SG-11', 'SG-12'],
    startsAt: at('2026-11-16 18:00').toISOString(),
    supply: 'HX-3',
    cart: 'MC-B',
    remarks:
      'GV-12 stands between SG-12 and SG-13 and has an elastomer bonnet. Above 50 V near the end of the ramp.',
  }
  return {
    title: 'Series bake of SG-11 and SG-12',
    state: 'draft',
    priority: 'normal',
    versions: [
      {
        content: { ...content, soakHours: 144, supply: null },
        reason: 'First version',
        madeAt: at('2026-11-05 10:20'),
      },
      {
        content,
        reason: 'SG-11 has never been baked: a day more of soak. HX-3 is free.',
        madeAt: at('2026-11-06 15:05'),
      },
    ],
    readyAt: null,
    closed: null,
    ticks: [
      { item: 'packaging-removed', by: 'odalys', at: at('2026-11-06 16:40') },
      { item: 'insulation-whole', by: 'nerys', at: at('2026-11-07 10:15') },
    ],
  }
}

interface Draft {
  title: string
  segments: string[]
  priority: PlanPriority
  madeAt: string
  reason: string
  remarks: string
}

/** Drafts that have neither a date nor a set nor a cart, and say what else they lack. */
const DRAFTS: readonly Draft[] = [
  {
    title: 'Bake of SG-14 after its vent',
    segments: ['SG-14'],
    priority: 'normal',
    madeAt: '2026-11-06 14:40',
    reason: 'Vented on 5 November, so it takes up water and has to be baked again',
    remarks:
      'Not before the new gauge is in, the segment is closed and pumped, and an isolation test is accepted. Its bake in July was broken off because the thermocouples drifted too far apart: look at the insulation first.',
  },
  {
    title: 'Series bake of SG-15 and SG-16',
    segments: ['SG-15', 'SG-16'],
    priority: 'normal',
    madeAt: '2026-11-06 15:30',
    reason: 'SG-16 has been above its target since the autumn and grows by about 6 % a week',
    remarks:
      'Open: whether SG-15 has to come along. It was baked in November 2025 and met its target when it last gave readings. Open as well: the getter pump of SG-16 may be what is tired, and a bake would not mend that. Permit draft HSP-2026-033 names SG-16 alone.',
  },
  {
    title: 'Series bake of SG-01 and SG-02',
    segments: ['SG-01', 'SG-02'],
    priority: 'can-wait',
    madeAt: '2026-11-06 16:10',
    reason: 'Meant for spring; here so that a free set and crew can be used before',
    remarks:
      'Both meet their target. Nothing has been prepared, nobody has been asked. Above 50 V near the end of the ramp.',
  },
]

function draftOf({ title, segments, priority, madeAt, reason, remarks }: Draft): DemoPlan {
  const content: BakePlanContent = { ...USUAL, segments, startsAt: null, supply: null, cart: null, remarks }
  return {
    title,
    state: 'draft',
    priority,
    versions: [{ content, reason, madeAt: at(madeAt) }],
    readyAt: null,
    closed: null,
    ticks: [],
  }
}

/** Writes the plans with their versions, predictions, ticks and signatures. */
export async function seedBakePlans(db: DbOrTx): Promise<number> {
  const ran = BAKES.filter(({ outcome }) => outcome === 'complete' || outcome === 'running')
  const plans = [...ran.map(planOf), nextPair(), ...DRAFTS.map(draftOf)]
  for (const plan of plans) await seedPlan(db, plan)
  return plans.length
}

async function seedPlan(db: DbOrTx, plan: DemoPlan): Promise<void> {
  const { title, state, priority, versions, readyAt, closed, ticks } = plan
  const first = versions[0]
  const last = versions.at(-1)
  if (first === undefined || last === undefined) throw new Error(`The demo's plan "${title}" has no version`)
  const [made] = await db.insert(bakePlan).values({
    title,
    state,
    priority,
    version: versions.length,
    createdBy: PLANNER,
    createdAt: first.madeAt,
    ...(closed === null ? {} : { closedBy: PLANNER, closedAt: closed.at, closeReason: closed.reason }),
  })
  const planId = made.insertId
  if (readyAt !== null) await sign(db, planId, versions.length, readyAt)
  await db
    .insert(bakePlanSegment)
    .values(
      last.content.segments.map((tag, sortOrder) => ({ planId, segmentId: segmentOf(tag).id, sortOrder })),
    )
  for (const [index, { content, reason, madeAt }] of versions.entries()) {
    const predicted = await predictFromRegister(db, content, madeAt)
    await db
      .insert(bakePlanVersion)
      .values({ planId, version: index + 1, content, predicted, reason, madeBy: PLANNER, madeAt })
  }
  if (ticks.length === 0) return
  await db
    .insert(bakePlanCheck)
    .values(
      ticks.map(({ item, by, at: setAt }) => ({ planId, item, done: true, setBy: PERSON_ID[by], setAt })),
    )
}

async function sign(db: DbOrTx, planId: number, version: number, readyAt: Date): Promise<void> {
  const [act] = await db.insert(signedAct).values({
    personId: PLANNER,
    meaning: 'sign a bake plan as ready',
    subjectKind: 'bake-plan',
    subjectId: String(planId),
    at: readyAt,
    machineAt: readyAt,
    usedAt: readyAt,
  })
  await db
    .update(bakePlan)
    .set({ baselineVersion: version, readyBy: PLANNER, readyAt, readySignedActId: act.insertId })
    .where(eq(bakePlan.id, planId))
}
