/** Bake plans of the demo: those of the bakes that ran to their end, those that run, and the next one, which is not ready. */
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
import type { BakePlanState } from '../../app/domain/planning.ts'
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

/** Writes the plans with their versions, predictions, ticks and signatures. */
export async function seedBakePlans(db: DbOrTx): Promise<number> {
  const ran = BAKES.filter(({ outcome }) => outcome === 'complete' || outcome === 'running')
  const plans = [...ran.map(planOf), nextPair()]
  for (const plan of plans) await seedPlan(db, plan)
  return plans.length
}

async function seedPlan(db: DbOrTx, plan: DemoPlan): Promise<void> {
  const { title, state, versions, readyAt, closed, ticks } = plan
  const first = versions[0]
  const last = versions.at(-1)
  if (first === undefined || last === undefined) throw new Error(`The demo's plan "${title}" has no version`)
  const [made] = await db.insert(bakePlan).values({
    title,
    state,
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
