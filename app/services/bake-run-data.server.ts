/** Series of a bake as the pure rules want them: thermocouples, supply and pressure in equal steps, and the plan. */
import type { DbOrTx } from '../db/client.server.ts'
import { findPositionIds, listBaselines } from '../db/queries/bake-runs.server.ts'
import {
  binReadings,
  factorAt,
  lastReadings,
  listFittingSpans,
  listMapSpans,
  listPositions,
} from '../db/queries/readings.server.ts'
import { listLimits, listSegments, listStates, type SegmentWithState } from '../db/queries/segments.server.ts'
import type { BakeStep, Planned } from '../domain/bake-deviations.ts'
import { bakesIn, type FoundBake } from '../domain/bake-history.ts'
import { type BakePlanContent, BakePlanContentSchema } from '../domain/bake-plan.ts'
import type { ThermocoupleNow } from '../domain/bake-run.ts'
import { DomainError } from '../domain/errors.ts'
import { powerText } from '../domain/power-text.ts'
import { QUALITY_LABELS } from '../domain/readings.ts'
import { median } from '../physics/statistics.ts'
import { limitFor } from './standing.server.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS
/** A plan belongs to a bake that began this near to the planned start. */
const SAME_BAKE_MS = 3 * DAY_MS

export interface BakeRunPlan {
  planId: number
  title: string
  version: number
  content: BakePlanContent
}

/**
 * A bake of a segment: the newest, or the one that began heating at `since` (ms UTC).
 *
 * @throws DomainError not-found
 */
export async function findBake(
  db: DbOrTx,
  tag: string,
  now: Date,
  since: number | null,
): Promise<{ segment: SegmentWithState; bakes: FoundBake[]; bake: FoundBake }> {
  const segment = (await listSegments(db, now)).find((each) => each.tag === tag)
  if (segment === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const bakes = bakesIn(await listStates(db, segment.id))
  const bake = since === null ? bakes[0] : bakes.find(({ heatingFrom }) => heatingFrom.getTime() === since)
  if (bake === undefined) {
    throw new DomainError(
      'not-found',
      since === null ? `${tag} has no bake on record here.` : `${tag} has no bake that began then.`,
    )
  }
  return { segment, bakes, bake }
}

/** A pressure inside a sentence: 2.1 × 10⁻⁴ Pa. */
export function pascalText(pa: number): string {
  return `${powerText(pa, 2)} Pa`
}

/** The frozen plan that a bake followed; null when none fits. */
export async function planOf(db: DbOrTx, segmentId: number, bake: FoundBake): Promise<BakeRunPlan | null> {
  let best: { plan: BakeRunPlan; apart: number } | null = null
  for (const row of await listBaselines(db, segmentId)) {
    const content = BakePlanContentSchema.parse(row.content)
    if (content.startsAt === null) continue
    const apart = Math.abs(new Date(content.startsAt).getTime() - bake.heatingFrom.getTime())
    if (apart <= SAME_BAKE_MS && (best === null || apart < best.apart)) {
      best = { plan: { planId: row.planId, title: row.title, version: row.version, content }, apart }
    }
  }
  return best?.plan ?? null
}

/** Setpoint, ramp and soak of a bake: from its plan, else from the limits of the site. */
export interface BakeTerms {
  setpointC: number
  upKH: number
  soakHours: number
  toleranceC: number | null
  spreadC: number | null
  rateKH: number | null
  holdPa: number | null
  abortPa: number | null
  touchC: number | null
  /** Limits of the site stand in for a plan. */
  fromSite: boolean
}

/** Null when neither a plan nor the site says how hot and how long. */
export async function termsOf(
  db: DbOrTx,
  segmentId: number,
  plan: BakeRunPlan | null,
  at: Date,
): Promise<BakeTerms | null> {
  const limits = await listLimits(db, at)
  const value = (kind: Parameters<typeof limitFor>[1]) => limitFor(limits, kind, segmentId)?.value ?? null
  const rateKH = value('ramp-rate')
  const setpointC = plan?.content.celsius ?? value('bake-temperature')
  const soakHours = plan?.content.soakHours ?? value('bake-hours')
  const upKH = plan?.content.upKH ?? rateKH
  if (setpointC === null || soakHours === null || upKH === null) return null
  return {
    setpointC,
    soakHours,
    upKH,
    toleranceC: value('bake-tolerance'),
    spreadC: plan?.content.spreadK ?? value('temperature-spread'),
    rateKH: plan?.content.upKH ?? rateKH,
    holdPa: plan?.content.holdPa ?? value('bake-hold-pressure'),
    abortPa: plan?.content.abortPa ?? value('bake-abort-pressure'),
    touchC: value('touch-limit'),
    fromSite: plan === null,
  }
}

/** The planned course of a bake that began when it did. */
export function plannedCourse(bake: FoundBake, terms: BakeTerms, ambientC: number): Planned {
  const start = bake.heatingFrom.getTime()
  const rampHours = Math.max(0, (terms.setpointC - ambientC) / terms.upKH)
  const soakFrom = bake.soakFrom?.getTime() ?? start + rampHours * HOUR_MS
  const off = bake.coolingFrom?.getTime() ?? Number.POSITIVE_INFINITY
  return {
    heatingFrom: start,
    soakFrom,
    soakUntil: Math.min(off, soakFrom + terms.soakHours * HOUR_MS),
    setpointC: (at) =>
      at < start || at >= off
        ? null
        : Math.min(terms.setpointC, ambientC + ((at - start) / HOUR_MS) * terms.upKH),
  }
}

export interface BakeSeries {
  stepSeconds: number
  /** Tag of the gauge whose pressure this is; empty where the segment has none. */
  gauge: string
  steps: BakeStep[]
  supply: { at: number; volts: number | null; amps: number | null }[]
}

/**
 * Series of a segment over [from, to) in steps. The pressure is that of the cross gauge, or of the first hot cathode.
 *
 * @param supply tag of the supply set that heats it; null when nobody has said
 */
export async function readBakeSeries(
  db: DbOrTx,
  segment: SegmentWithState,
  window: { from: Date; to: Date; stepSeconds: number },
  supply: string | null,
): Promise<BakeSeries> {
  const { from, to, stepSeconds } = window
  const positions = await listPositions(db, {
    segmentId: segment.id,
    kinds: ['thermocouple', 'hot-cathode'],
  })
  const couples = positions.filter(({ kind }) => kind === 'thermocouple')
  const hot = positions.filter(({ kind }) => kind === 'hot-cathode')
  const gauge = hot.find(({ tag }) => tag.endsWith('B')) ?? hot[0]
  const supplies = await findPositionIds(db, supply === null ? [] : [`${supply}-U`, `${supply}-I`])
  const [temperatures, pressures, electrics] = await Promise.all([
    columnsOf(
      db,
      couples.map(({ id }) => id),
      window,
      false,
    ),
    columnsOf(db, gauge === undefined ? [] : [gauge.id], window, true),
    columnsOf(
      db,
      supplies.map(({ id }) => id),
      window,
      false,
    ),
  ])
  const volts = electrics.get(supplies.find(({ tag }) => tag.endsWith('-U'))?.id ?? -1)
  const amps = electrics.get(supplies.find(({ tag }) => tag.endsWith('-I'))?.id ?? -1)
  const pressure = gauge === undefined ? undefined : pressures.get(gauge.id)
  const count = Math.ceil((to.getTime() - from.getTime()) / 1000 / stepSeconds)
  const steps: BakeStep[] = []
  const supplied: BakeSeries['supply'] = []
  for (let step = 0; step < count; step++) {
    const at = from.getTime() + step * stepSeconds * 1000
    const told = couples.flatMap(({ id }) => {
      const value = temperatures.get(id)?.[step] ?? null
      return value === null ? [] : [value]
    })
    steps.push({
      at,
      minC: told.length === 0 ? null : Math.min(...told),
      medianC: told.length === 0 ? null : median(told),
      maxC: told.length === 0 ? null : Math.max(...told),
      pressurePa: pressure?.[step] ?? null,
      supplyAmps: amps?.[step] ?? null,
    })
    supplied.push({ at, volts: volts?.[step] ?? null, amps: amps?.[step] ?? null })
  }
  return { stepSeconds, gauge: gauge?.tag ?? '', steps, supply: supplied }
}

/** Means of positions in equal steps, by the channel map and the factors of their instruments. */
async function columnsOf(
  db: DbOrTx,
  positionIds: readonly number[],
  { from, to, stepSeconds }: { from: Date; to: Date; stepSeconds: number },
  logarithmic: boolean,
): Promise<Map<number, (number | null)[]>> {
  const [spans, fittings] = await Promise.all([
    listMapSpans(db, positionIds, from, to),
    listFittingSpans(db, positionIds),
  ])
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from,
    to,
    binSeconds: stepSeconds,
    logarithmic,
  })
  const count = Math.ceil((to.getTime() - from.getTime()) / 1000 / stepSeconds)
  const columns = new Map<number, (number | null)[]>()
  for (const span of spans) {
    let column = columns.get(span.positionId)
    if (column === undefined) {
      column = new Array<number | null>(count).fill(null)
      columns.set(span.positionId, column)
    }
    for (const bin of bins) {
      const at = new Date(bin.atMs)
      if (bin.channelId !== span.channelId || at < span.from || (span.to !== null && at >= span.to)) continue
      const step = Math.round((bin.atMs - from.getTime()) / 1000 / stepSeconds)
      if (step < 0 || step >= count) continue
      column[step] = bin.mean * factorAt(fittings, span.positionId, at)
    }
  }
  return columns
}

/** The newest of every thermocouple of a segment, with what its logger said since where that was no value. */
export async function readThermocouples(
  db: DbOrTx,
  segmentId: number,
  now: Date,
): Promise<ThermocoupleNow[]> {
  const positions = await listPositions(db, { segmentId, kinds: ['thermocouple'] })
  const ids = positions.map(({ id }) => id)
  const [spans, fittings] = await Promise.all([
    listMapSpans(db, ids, new Date(now.getTime() - DAY_MS), new Date(now.getTime() + 1)),
    listFittingSpans(db, ids),
  ])
  const newest = await lastReadings(db, [...new Set(spans.map(({ channelId }) => channelId))], now)
  return positions.map(({ id, tag, chainageM }): ThermocoupleNow => {
    const found = spans
      .filter(({ positionId }) => positionId === id)
      .map(({ channelId }) => newest.get(channelId))
      .sort((a, b) => (b?.any?.at.getTime() ?? 0) - (a?.any?.at.getTime() ?? 0))[0]
    const usable = found?.usable ?? null
    const any = found?.any ?? null
    const later = any !== null && (usable === null || any.at > usable.at)
    return {
      tag,
      chainageM: chainageM ?? 0,
      celsius:
        usable === null || usable.value === null ? null : usable.value * factorAt(fittings, id, usable.at),
      at: usable?.at.getTime() ?? null,
      since: later ? QUALITY_LABELS[any.quality] : '',
    }
  })
}
