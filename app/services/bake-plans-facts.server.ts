/** What the register and the log say of the segments, parts and supplies that a bake plan rests on. */
import type { DbOrTx } from '../db/client.server.ts'
import {
  lastLeakCheck,
  listBlankets,
  listCarts,
  listPlansUnderWay,
  listPlanTicks,
  listSupplies,
  listValvesOf,
} from '../db/queries/bake-plans.server.ts'
import { listCompetences } from '../db/queries/competences.server.ts'
import { type IsolationTestRow, listIsolationTests } from '../db/queries/isolation-tests.server.ts'
import {
  type LimitRow,
  listLimits,
  listPlacedPumps,
  listSegments,
  listStates,
  type PlacedPump,
  type SegmentWithState,
} from '../db/queries/segments.server.ts'
import { ampsAndVolts, type BakedSegment, pairObjection, powerW } from '../domain/bake-load.ts'
import { type BakePlanContent, BakePlanContentSchema, stepOf } from '../domain/bake-plan.ts'
import { type PlannedSegment, type PlanPrediction, predictPlan } from '../domain/bake-plan-prediction.ts'
import {
  type PlanFacts,
  type ReadinessItem,
  type SegmentFacts,
  TICKED_ITEM_KEYS,
  tubeItems,
} from '../domain/bake-plan-readiness.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'
import { firstGap } from '../domain/permit-conflicts/competences.ts'
import type { IsolationTestState } from '../domain/planning.ts'
import type { SegmentModel } from '../physics/predict.ts'
import { coldModel, hydrogenExcess, scaleHydrogen } from './segment-model.server.ts'
import { crossOf } from './segment-page.server.ts'
import { getSite } from './site.server.ts'
import { limitFor, readStandings } from './standing.server.ts'

const HOUR_MS = 3_600_000
/** The latest instant that a date can hold: for spans without an end. */
const LAST_INSTANT = new Date(8_640_000_000_000_000)

/** A plan's content as it was stored; a row that no longer reads is a fault of ours and is said as one. */
export function contentOf(stored: unknown): BakePlanContent {
  return BakePlanContentSchema.parse(stored)
}

/**
 * The segments of a plan by tag, in the plan's order.
 *
 * @throws DomainError bad-input for a tag that the register does not have
 */
export async function planSegments(
  db: DbOrTx,
  tags: readonly string[],
  now: Date,
): Promise<SegmentWithState[]> {
  const all = await listSegments(db, now)
  return tags.map((tag) => {
    const found = all.find((one) => one.tag === tag)
    if (found !== undefined) return found
    throw new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: {
        segments: [`The register has no segment "${tag}". Write tags as they stand there, such as SG-05.`],
      },
    })
  })
}

/** A segment as the heater sees it. */
function bakedSegment(segment: SegmentWithState, blanketW: number): BakedSegment {
  const { tag, startM, endM, innerDiameterM, wallM, insulationM, insulationWPerMK, resistance20Ohm } = segment
  const { bellowsCount, bellowsTravelMm, bellowsRatedMm, feeder } = segment
  return {
    tag,
    startM,
    endM,
    innerDiameterM,
    wallM,
    insulationM,
    insulationWPerMK,
    resistance20Ohm,
    bellowsCount,
    bellowsTravelMm,
    bellowsRatedMm,
    blanketW,
    feeder,
  }
}

export async function bakedSegments(
  db: DbOrTx,
  segments: readonly SegmentWithState[],
): Promise<BakedSegment[]> {
  const blankets = await listBlankets(
    db,
    segments.map(({ id }) => id),
  )
  return segments.map((segment) => {
    const own = blankets.filter(({ segmentId }) => segmentId === segment.id)
    return bakedSegment(
      segment,
      own.reduce((sum, { powerW: watts }) => sum + (watts ?? 0), 0),
    )
  })
}

/** Since when a segment has not been open to gas; null where no opening is on record. */
async function closedSince(db: DbOrTx, segmentId: number, now: Date): Promise<Date | null> {
  const open = (await listStates(db, segmentId)).find(
    ({ state, since }) => since <= now && (state === 'vented' || state === 'not-assembled'),
  )
  return open === undefined ? null : (open.endedAt ?? now)
}

/** Whether gas has been let in since the last heat: then the wall carries water again, whatever the register's year says. */
async function isWet(db: DbOrTx, segmentId: number, now: Date): Promise<boolean> {
  const past = (await listStates(db, segmentId)).filter(({ since }) => since <= now)
  const vent = past.findIndex(({ state }) => state === 'vented')
  const heat = past.findIndex(({ state }) => state === 'soak')
  return vent >= 0 && (heat < 0 || vent < heat)
}

/** A segment with no opening on record has been pumped for years; more of it changes nothing. */
const LONG_PUMPED_H = 2 * 8766

/** Hours of cold pumping between the last opening of a segment and the start of heating. */
async function coldHoursBefore(
  db: DbOrTx,
  content: Pick<BakePlanContent, 'startsAt' | 'prepHours'>,
  segmentId: number,
  now: Date,
): Promise<number> {
  const start =
    content.startsAt === null ? now.getTime() + content.prepHours * HOUR_MS : Date.parse(content.startsAt)
  const since = await closedSince(db, segmentId, now)
  return since === null ? LONG_PUMPED_H : Math.min(LONG_PUMPED_H, (start - since.getTime()) / HOUR_MS)
}

/** Segments with their heat, and their vacuum on the cart named (the first one otherwise) and after it. */
export async function plannedSegments(
  db: DbOrTx,
  content: Pick<BakePlanContent, 'cart' | 'startsAt' | 'prepHours'>,
  segments: readonly SegmentWithState[],
  now: Date,
): Promise<PlannedSegment[]> {
  const baked = await bakedSegments(db, segments)
  const carts = await listCarts(db)
  const cart = carts.find(({ tag }) => tag === content.cart) ?? carts[0]
  const placed = await listPlacedPumps(
    db,
    segments.map(({ id }) => id),
  )
  return Promise.all(
    segments.map(async (segment, i) => {
      const own = placed.filter(({ segmentId, kind }) => segmentId === segment.id && kind === 'getter-ion')
      // The cart is joined where the segment's own pump stands, at the cross.
      const offsetM = own.at(-1)?.offsetM ?? (segment.endM - segment.startM) / 2
      const onCart: PlacedPump[] =
        cart === undefined
          ? []
          : [
              {
                placementId: 0,
                segmentId: segment.id,
                offsetM,
                startsAt: now,
                endsAt: null,
                tag: cart.tag,
                kind: cart.kind,
                speeds: cart.speeds,
                ultimatePa: cart.ultimatePa,
              },
            ]
      const wet = await isWet(db, segment.id, now)
      const asPlanned = wet ? { ...segment, lastBakeYear: null } : segment
      return {
        baked: baked[i] as BakedSegment,
        hot: coldModel(asPlanned, onCart),
        after: own.length === 0 ? null : coldModel(segment, own.slice(-1)),
        coldHours: await coldHoursBefore(db, content, segment.id, now),
      }
    }),
  )
}

/** Predicts a plan from the register as it stands now. */
export async function predictFromRegister(
  db: DbOrTx,
  content: BakePlanContent,
  now: Date,
): Promise<PlanPrediction> {
  const segments = await planSegments(db, content.segments, now)
  const { ambientC } = await getSite(db)
  const planned = await plannedSegments(db, content, segments, now)
  const scaled = await Promise.all(planned.map((one) => scaledToReading(db, one, now)))
  return predictPlan(content, scaled, ambientC)
}

/** A baked segment that reads above its model gives more hydrogen than the register says: as the bake options take it. */
async function scaledToReading(db: DbOrTx, planned: PlannedSegment, now: Date): Promise<PlannedSegment> {
  const { hot, after } = planned
  const later = after ?? hot
  if (later === null) return planned
  const [standing] = await readStandings(db, now, planned.baked.tag)
  const times = hydrogenExcess(later, standing === undefined ? null : crossOf(standing))
  const scaled = (model: SegmentModel | null) =>
    model === null ? null : { ...model, hydrogen: scaleHydrogen(model.hydrogen, times) }
  return times === 1 ? planned : { ...planned, hot: scaled(hot), after: scaled(after) }
}

/** Everything the checklist of a plan is judged by, at an instant. */
export async function readPlanFacts(
  db: DbOrTx,
  plan: { id: number; content: BakePlanContent; prediction: PlanPrediction },
  now: Date,
): Promise<PlanFacts> {
  const { content, prediction } = plan
  const segments = await planSegments(db, content.segments, now)
  const { ambientC, timeZone } = await getSite(db)
  const baked = await bakedSegments(db, segments)
  const limits = await listLimits(db, now)
  const busy = (await listPlansUnderWay(db, plan.id)).map((one) => ({
    segments: one.segments,
    content: contentOf(one.content),
  }))
  const supply = (await listSupplies(db)).find(({ tag }) => tag === content.supply)
  const cart = (await listCarts(db)).find(({ tag }) => tag === content.cart)
  const rampEndKW = baked.map((one) => powerW(one, ambientC, content.celsius, content.upKH).totalW / 1000)
  return {
    segments: await Promise.all(segments.map((segment) => segmentFacts(db, segment, now))),
    pairObjection: baked[1] === undefined ? null : pairObjection(baked[0] as BakedSegment, baked[1]),
    overheated: await overheatedParts(db, segments, content.celsius, ambientC),
    supply:
      supply === undefined
        ? null
        : {
            tag: supply.tag,
            maxAmps: supply.maxAmps,
            maxVolts: supply.maxVolts,
            busyOn: busy.find((one) => one.content.supply === supply.tag)?.segments ?? null,
          },
    load: ampsAndVolts(baked, ambientC, content.celsius, content.upKH),
    cart:
      cart === undefined
        ? null
        : { tag: cart.tag, busyOn: busy.find((one) => one.content.cart === cart.tag)?.segments ?? null },
    power: {
      peakKW: rampEndKW.reduce((sum, kW) => sum + kW, 0),
      baseKW: limitFor(limits, 'power-base', null)?.value ?? 0,
      capKW: highestCap(limits),
    },
    feeders: feederLoads(baked, rampEndKW, limits),
    bellows: prediction.segments.map(({ tag, strokeMm, ratedMm }) => ({
      segment: tag,
      strokeMm: Math.max(0, ...strokeMm),
      ratedMm,
    })),
    electricians: await electriciansAt(
      db,
      content.startsAt === null ? now : new Date(content.startsAt),
      timeZone,
    ),
    hotUntilDay:
      content.startsAt === null
        ? null
        : instantText(
            new Date(Date.parse(content.startsAt) + stepOf(prediction.steps, 'cool-down').toH * HOUR_MS),
            timeZone,
          ).slice(0, 10),
    predicted: {
      afterPa: worst(prediction.segments.map(({ afterPa }) => afterPa)),
      targetPa: content.targetPa,
      stuck: prediction.stuck,
    },
    ticks: await ticksOf(db, plan.id),
  }
}

/**
 * What the records show of the tube that is to be baked, met or not.
 *
 * @param tags segments; a tag that the register does not have is left out, and told by what is missing of its paper
 * @param celsius the hottest that the tube may become; null while nobody has said, and then no part is held against it
 */
export async function readTubeItems(
  db: DbOrTx,
  tags: readonly string[],
  celsius: number | null,
  now: Date,
): Promise<ReadinessItem[]> {
  const all = await listSegments(db, now)
  const segments = tags.flatMap((tag) => all.find((one) => one.tag === tag) ?? [])
  const { ambientC } = await getSite(db)
  return tubeItems({
    segments: await Promise.all(segments.map((segment) => segmentFacts(db, segment, now))),
    overheated: celsius === null ? [] : await overheatedParts(db, segments, celsius, ambientC),
  })
}

/** Electricians whose licence holds at an instant, with the last day of it; one renewed without a break goes on. */
async function electriciansAt(db: DbOrTx, at: Date, zone: string): Promise<PlanFacts['electricians']> {
  const licences = await listCompetences(db, { kind: 'electrician-licence' })
  return [...new Set(licences.map(({ personId }) => personId))].flatMap((personId) => {
    const own = licences.filter((one) => one.personId === personId)
    const ends = firstGap(
      own.map(({ startsAt, endsAt }) => ({ from: startsAt, to: endsAt })),
      { from: at, to: LAST_INSTANT },
    )
    const [first] = own
    if (first === undefined || ends?.getTime() === at.getTime()) return []
    return [
      {
        name: first.personName,
        licence: [...new Set(own.map(({ number }) => number))].join(', '),
        endsOn: ends === null ? null : instantText(new Date(ends.getTime() - 1), zone).slice(0, 10),
      },
    ]
  })
}

function worst(values: readonly (number | null)[]): number | null {
  const known = values.filter((value) => value !== null)
  return known.length < values.length || known.length === 0 ? null : Math.max(...known)
}

/** Newest tests of a segment that are looked through for an accepted one. */
const TESTS_LOOKED_AT = 50

const NOTES: Record<IsolationTestState, (voidRemark: string) => string> = {
  recorded: () => 'waits for an engineer',
  accepted: () => '',
  voided: (remark) => `was voided: ${remark.replace(/\.$/, '')}`,
}

/** Why the newest test does not count: an opening since, or its own standing, or both. */
function isolationNote(newest: IsolationTestRow | undefined, since: Date | null, zone: string): string {
  if (newest === undefined) return ''
  const standing = NOTES[newest.state](newest.voidRemark)
  const older =
    since !== null && newest.closedAt < since
      ? `is from before that, begun ${instantText(newest.closedAt, zone)}`
      : ''
  const why = [older, standing].filter((text) => text !== '').join(', and ')
  return why === '' ? '' : `the newest one ${why}`
}

async function segmentFacts(db: DbOrTx, segment: SegmentWithState, now: Date): Promise<SegmentFacts> {
  const since = await closedSince(db, segment.id, now)
  const tests = await listIsolationTests(db, segment.id, TESTS_LOOKED_AT)
  const accepted = tests.find(
    ({ state, closedAt }) => state === 'accepted' && (since === null || closedAt >= since),
  )
  const { timeZone } = await getSite(db)
  return {
    tag: segment.tag,
    leakCheckedAt: await lastLeakCheck(db, segment.id, since),
    isolationTestAt: accepted?.acceptedAt ?? null,
    isolationNote: isolationNote(tests[0], since, timeZone),
  }
}

async function overheatedParts(
  db: DbOrTx,
  segments: readonly SegmentWithState[],
  celsius: number,
  ambientC: number,
): Promise<PlanFacts['overheated']> {
  const valves = await listValvesOf(
    db,
    segments.map(({ id }) => id),
  )
  return valves.flatMap(({ tag, limitC, partRiseShare }) => {
    const reachesC = ambientC + partRiseShare * (celsius - ambientC)
    return reachesC > limitC ? [{ part: tag, reachesC, limitC }] : []
  })
}

function highestCap(limits: readonly LimitRow[]): number | null {
  const caps = (['power-cap-day', 'power-cap-night'] as const)
    .map((kind) => limitFor(limits, kind, null)?.value ?? null)
    .filter((cap) => cap !== null)
  return caps.length === 0 ? null : Math.max(...caps)
}

function feederLoads(
  baked: readonly BakedSegment[],
  kW: readonly number[],
  limits: readonly LimitRow[],
): PlanFacts['feeders'] {
  return (['west', 'east'] as const).flatMap((name) => {
    const limitKW = limitFor(limits, `feeder-${name}`, null)?.value ?? null
    const peakKW = baked.reduce((sum, { feeder }, i) => sum + (feeder === name ? (kW[i] ?? 0) : 0), 0)
    return limitKW === null || peakKW === 0 ? [] : [{ name, peakKW, limitKW }]
  })
}

async function ticksOf(db: DbOrTx, planId: number): Promise<PlanFacts['ticks']> {
  const rows = await listPlanTicks(db, planId)
  return Object.fromEntries(
    TICKED_ITEM_KEYS.flatMap((key) => {
      const last = rows.findLast(({ item }) => item === key)
      return last === undefined ? [] : [[key, last]]
    }),
  )
}
