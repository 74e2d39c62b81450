/** What the pages of bakes and bake plans show. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listCarts, listPlans, listPlanVersions, listSupplies } from '../db/queries/bake-plans.server.ts'
import { listLimits, listSegments, listSegmentTags } from '../db/queries/segments.server.ts'
import { type Actor, may } from '../domain/actor.ts'
import {
  type BakePlanContent,
  type PermitWindow,
  permitChainText,
  permitWindows,
  stepOf,
} from '../domain/bake-plan.ts'
import { differences } from '../domain/bake-plan-differences.ts'
import { planFormValues } from '../domain/bake-plan-form.ts'
import { type PlanPrediction, PlanPredictionSchema } from '../domain/bake-plan-prediction.ts'
import { type ReadinessItem, readiness } from '../domain/bake-plan-readiness.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'
import type { BakePlanState, PlanPriority } from '../domain/planning.ts'
import { SEGMENT_STATES, type SegmentState } from '../domain/segment-states.ts'
import { readExcess } from './bake-options.server.ts'
import { readPlan } from './bake-plans.server.ts'
import { contentOf, readPlanFacts } from './bake-plans-facts.server.ts'
import { listPermitBriefs, type PermitBrief } from './permit-register.server.ts'
import { getSite } from './site.server.ts'
import { limitFor } from './standing.server.ts'

interface PlanLine {
  id: number
  title: string
  state: BakePlanState
  priority: PlanPriority
  version: number
  segments: readonly string[]
  celsius: number
  soakHours: number
  /** Hours from the start of heating until the tube is cold. */
  hotHours: number
  peakKW: number
  energyKWh: number
  startsAt: Date | null
  createdBy: string
}

export interface BakesPageData {
  running: { tag: string; state: SegmentState; since: Date | null; reason: string }[]
  plans: PlanLine[]
  mayPlan: boolean
}

/** Bakes that run and all plans, newest first. */
export async function readBakesPage(db: Db, actor: Actor, now: Date): Promise<BakesPageData> {
  const [segments, plans] = await Promise.all([listSegments(db, now), listPlans(db)])
  return {
    running: segments
      .filter(({ state }) => SEGMENT_STATES[state].hot)
      .map(({ tag, state, since, stateReason }) => ({ tag, state, since, reason: stateReason })),
    plans: plans.map((plan) => {
      const content = contentOf(plan.content)
      const prediction = PlanPredictionSchema.parse(plan.predicted)
      return {
        id: plan.id,
        title: plan.title,
        state: plan.state,
        priority: plan.priority,
        version: plan.version,
        segments: content.segments,
        celsius: content.celsius,
        soakHours: content.soakHours,
        hotHours: stepOf(prediction.steps, 'cool-down').toH,
        peakKW: prediction.peakKW,
        energyKWh: prediction.energyKWh,
        startsAt: content.startsAt === null ? null : new Date(content.startsAt),
        createdBy: plan.createdBy,
      }
    }),
    mayPlan: may(actor, 'bake:plan'),
  }
}

interface VersionLine {
  version: number
  madeBy: string
  madeAt: Date
  reason: string
  /** Against the version before; empty for the first. */
  differences: string[]
}

export interface PlanPageData {
  id: number
  title: string
  state: BakePlanState
  priority: PlanPriority
  version: number
  baselineVersion: number | null
  createdBy: string
  createdAt: Date
  readyBy: string | null
  readyAt: Date | null
  closedAt: Date | null
  closeReason: string
  revision: number
  content: BakePlanContent
  prediction: PlanPrediction
  checklist: ReadinessItem[]
  permits: PermitWindow[]
  permitChain: string | null
  load: { amps: number; volts: number }
  /** Segments that now read more than the hydrogen that the prediction takes, and how many times it; none once closed. */
  excess: { segment: string; times: number }[]
  versions: VersionLine[]
  /** Permits drawn up from it. */
  drawnUp: PermitBrief[]
  may: { draftPermit: boolean; plan: boolean; tick: boolean; prioritise: boolean; moveOn: boolean }
}

/** One plan with its checklist judged now; a closed plan keeps its prediction and shows no open steps. */
export async function readPlanPage(db: Db, actor: Actor, now: Date, planId: number): Promise<PlanPageData> {
  const { plan, content, prediction } = await readPlan(db, planId)
  const [facts, versions, drawnUp] = await Promise.all([
    readPlanFacts(db, { id: planId, content, prediction }, now),
    listPlanVersions(db, planId),
    listPermitBriefs(db, { planId }, now),
  ])
  const permits = permitWindows(prediction.steps)
  const open = plan.state === 'draft' || plan.state === 'ready'
  const excess = open ? await readExcess(db, content.segments, now) : []
  const { id, title, state, priority, version, baselineVersion, createdBy, createdAt } = plan
  const { readyBy, readyAt, closedAt, closeReason, revision } = plan
  return {
    id,
    title,
    state,
    priority,
    version,
    baselineVersion,
    createdBy,
    createdAt,
    readyBy,
    readyAt,
    closedAt,
    closeReason,
    revision,
    content,
    prediction,
    checklist: open ? readiness(facts) : [],
    permits,
    permitChain: permitChainText(permits),
    load: facts.load,
    excess,
    drawnUp,
    versions: versions
      .map((row, i) => {
        const before = versions[i - 1]
        return {
          version: row.version,
          madeBy: row.madeBy,
          madeAt: row.madeAt,
          reason: row.reason,
          differences:
            before === undefined ? [] : differences(contentOf(before.content), contentOf(row.content)),
        }
      })
      .reverse(),
    may: {
      draftPermit: (open || state === 'under-way') && may(actor, 'permit:draft'),
      plan: open && may(actor, 'bake:plan'),
      tick: open && may(actor, 'bake:note'),
      prioritise: open && may(actor, 'bake:prioritise'),
      moveOn: (state === 'ready' || state === 'under-way') && may(actor, 'bake:note'),
    },
  }
}

export interface PlanFormData {
  /** What stands in the form at first. */
  values: Record<string, string>
  segments: string[]
  supplies: { tag: string; maxAmps: number; maxVolts: number }[]
  carts: string[]
  /** The plan that a new version is made of; null for a new plan. */
  of: { id: number; title: string; version: number; revision: number; state: BakePlanState } | null
  zone: string
}

/** The form for a new plan, from an option that was chosen or from the site's limits, or for a new version of a plan. */
export async function readPlanForm(db: Db, now: Date, asked: URLSearchParams): Promise<PlanFormData> {
  const [site, segments, supplies, carts] = await Promise.all([
    getSite(db),
    listSegmentTags(db),
    listSupplies(db),
    listCarts(db),
  ])
  const of = asked.get('of')
  const written = (at: Date) => instantText(at, site.timeZone).slice(0, 16)
  const common = {
    segments,
    supplies: supplies.map(({ tag, maxAmps, maxVolts }) => ({ tag, maxAmps, maxVolts })),
    carts: carts.map(({ tag }) => tag),
    zone: site.timeZone,
  }
  if (of === null) {
    const content = await usualContent(db, now, asked)
    const title = content.segments.length === 0 ? '' : `Bake of ${content.segments.join(' + ')}`
    return { ...common, values: planFormValues(title, content, written), of: null }
  }
  const { plan, content } = await readPlan(db, Number(of))
  const { id, title, version, revision, state } = plan
  if (state !== 'draft' && state !== 'ready') {
    throw new DomainError(
      'not-acceptable-now',
      `Plan ${id} is closed and takes no new version. Make a new plan.`,
    )
  }
  return {
    ...common,
    values: planFormValues(title, placed(content, asked), written),
    of: { id, title, version, revision, state },
  }
}

/** A plan with the place that the address names, as a schedule gives it: start, supply set and cart. */
function placed(content: BakePlanContent, asked: URLSearchParams): BakePlanContent {
  const startsAt = asked.get('startsAt')
  return {
    ...content,
    ...(startsAt === null || Number.isNaN(Date.parse(startsAt)) ? {} : { startsAt }),
    supply: asked.get('supply') ?? content.supply,
    cart: asked.get('cart') ?? content.cart,
  }
}

/** The site's usual bake by its limits, with what the address asks for. */
async function usualContent(db: DbOrTx, now: Date, asked: URLSearchParams): Promise<BakePlanContent> {
  const limits = await listLimits(db, now)
  const usual = (kind: Parameters<typeof limitFor>[1], otherwise: number) =>
    limitFor(limits, kind, null)?.value ?? otherwise
  const number = (name: string, otherwise: number) => {
    const value = Number(asked.get(name) ?? Number.NaN)
    return Number.isFinite(value) && value > 0 ? value : otherwise
  }
  const segments = (asked.get('segments') ?? '')
    .split(',')
    .map((tag) => tag.trim())
    .filter((tag) => tag !== '')
    .slice(0, 2)
  return {
    segments,
    startsAt: null,
    prepHours: 48,
    celsius: number('celsius', usual('bake-temperature', 150)),
    upKH: number('ramp', usual('ramp-rate', 10)),
    holdPa: usual('bake-hold-pressure', 1e-2),
    abortPa: limitFor(limits, 'bake-abort-pressure', null)?.value ?? null,
    spreadK: usual('temperature-spread', 20),
    soakHours: Math.ceil(number('hours', usual('bake-hours', 168))),
    soakEnd: { fallPercent: 10, waterBehind: true },
    cooling: { kind: 'natural' },
    pumpChangeC: 80,
    coldC: usual('touch-limit', 40),
    testHours: 48,
    supply: null,
    cart: null,
    targetPa: number('target', usual('target', 2e-7)),
    remarks: '',
  }
}
