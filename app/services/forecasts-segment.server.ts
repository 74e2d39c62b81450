/** The forecast of one pump-down: readings, window, fit, its parts, and what holds the pressure up. */
import type { DbOrTx } from '../db/client.server.ts'
import { listEntries } from '../db/queries/logbook.server.ts'
import { listPositions, type PositionRow } from '../db/queries/readings.server.ts'
import {
  listLimits,
  listPlacedPumps,
  listSegments,
  type PlacedPump,
  type SegmentWithState,
} from '../db/queries/segments.server.ts'
import { DomainError } from '../domain/errors.ts'
import { type BindingAnswer, bindingOf } from '../domain/forecast-words.ts'
import type { EntryKind } from '../domain/logbook.ts'
import { type Forecast, forecastTimeToTarget } from '../physics/forecast.ts'
import { nitrogenEquivalent } from '../physics/gauges.ts'
import { hoursToReach, predictPumpDown } from '../physics/predict.ts'
import { fitPumpDown } from '../physics/pump-down-fit.ts'
import { PumpDownDataError } from '../physics/trend.ts'
import { readGaugeSeries, type SeriesPoint, stepSecondsFor } from './forecasts-series.server.ts'
import { coldModel } from './segment-model.server.ts'
import { limitFor } from './standing.server.ts'

const HOUR_MS = 3_600_000
const STEPS = 400
/** Good hours that a forecast needs. */
const LEAST_HOURS = 12
/** What is done this soon after the cross-over belongs to the cross-over. */
const START_MS = 15 * 60_000
/** Entries of these kinds, where their writer put them on the chart, change what the curve means. */
const CHANGING: readonly EntryKind[] = ['pump', 'valve', 'heat', 'vent']

/** A segment as a forecast needs it, at an instant. */
export interface ForecastSubject {
  segment: SegmentWithState
  pumps: PlacedPump[]
  /** Gauge the forecast goes by: the hot cathode at the cross, else any; null when the segment has none. */
  gauge: PositionRow | null
  targetPa: number | null
  limitPa: number | null
}

/** @throws DomainError not-found */
export async function readForecastSubject(db: DbOrTx, tag: string, at: Date): Promise<ForecastSubject> {
  const segment = (await listSegments(db, at)).find((each) => each.tag === tag)
  if (segment === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const [pumps, gauges, limits] = await Promise.all([
    listPlacedPumps(db, [segment.id], at),
    listPositions(db, { segmentId: segment.id, kinds: ['hot-cathode'] }),
    listLimits(db, at),
  ])
  return {
    segment,
    pumps,
    gauge: gauges.find(({ tag: each }) => each.endsWith('B')) ?? gauges[0] ?? null,
    targetPa: limitFor(limits, 'target', segment.id)?.value ?? null,
    limitPa: limitFor(limits, 'operating-limit', segment.id)?.value ?? null,
  }
}

export interface ForecastAsk {
  /** Null for the next power of ten below the last reading. */
  targetPa: number | null
  /** Window chosen by the reader; null where the product chooses. */
  from: Date | null
  to: Date | null
}

export interface Change {
  at: Date
  what: string
}

/** What a pump-down is made of now, as the gauge reads it, Pa. */
export interface Parts {
  alpha: number
  alphaSe: number
  /** Falling part: water, on an unbaked wall. */
  fallingPa: number
  /** Null where the readings show no constant part; then it lies below the upper bound (95 %). */
  constantPa: number | null
  constantUpperPa: number
  /** Hydrogen out of the steel by the register; null without a model. */
  hydrogenPa: number | null
}

export interface SegmentForecast {
  gauge: { id: number; tag: string }
  startedAt: Date
  /** Last instant that the readings were taken up to. */
  until: Date
  askedPa: number
  chosen: boolean
  points: SeriesPoint[]
  changes: Change[]
  /** What the reader chose; null for the product's own choice. */
  window: { from: Date; to: Date } | null
  result: Forecast
  parts: Parts | null
  binding: BindingAnswer | null
  modelHours: number | null
}

/**
 * The forecast of a segment that is being pumped down; null for any other state, and without a gauge or a reading.
 *
 * @param at the present, or the moment in the past at which the forecast would have been made
 */
export async function forecastSegment(
  db: DbOrTx,
  subject: ForecastSubject,
  at: Date,
  ask: ForecastAsk,
): Promise<SegmentForecast | null> {
  const { segment, gauge, pumps } = subject
  const startedAt = segment.since
  if (segment.state !== 'pumping' || startedAt === null || gauge === null || startedAt >= at) return null
  const stepSeconds = stepSecondsFor(startedAt, at, STEPS)
  const [points, changes] = await Promise.all([
    readGaugeSeries(db, gauge.id, { from: startedAt, to: at, stepSeconds }),
    changesSince(db, segment.id, startedAt, at),
  ])
  const last = points.at(-1)
  if (last === undefined) return null
  const askedPa = ask.targetPa ?? Number(`1e${Math.ceil(Math.log10(last.pa)) - 1}`)
  const window =
    ask.from === null && ask.to === null ? null : { from: ask.from ?? startedAt, to: ask.to ?? at }
  const hoursOf = (instant: Date) => (instant.getTime() - startedAt.getTime()) / HOUR_MS
  const used = points.filter((point) => window === null || (point.at >= window.from && point.at <= window.to))
  const series = { hours: used.map((point) => hoursOf(point.at)), pa: used.map(({ pa }) => pa) }
  const changed = changes.findLast((change) => window === null || change.at < window.to)
  const result =
    (window === null ? null : refusedWindow(window, changes, hoursOf)) ??
    forecastTimeToTarget(series, {
      targetPa: askedPa,
      ...startOf(window === null ? (changed?.at ?? null) : window.from, hoursOf),
    })
  const model = coldModel(segment, pumps)
  const atM = (gauge.chainageM ?? segment.startM) - segment.startM
  const parts = partsOf(
    series,
    result,
    hoursOf(at),
    model === null ? null : hydrogenAt(model, hoursOf(at), atM),
  )
  return {
    gauge: { id: gauge.id, tag: gauge.tag },
    startedAt,
    until: at,
    askedPa,
    chosen: ask.targetPa !== null,
    points,
    changes,
    window,
    result,
    parts,
    binding: bindingOf({
      targetPa: askedPa,
      hydrogenPa: parts?.hydrogenPa ?? null,
      constantPa: parts?.constantPa ?? null,
      earliestHours: earliestHours(result, parts, hoursOf(at), last.pa / askedPa),
    }),
    modelHours: model === null ? null : hoursToReach(model, askedPa, atM),
  }
}

function startOf(from: Date | null, hoursOf: (at: Date) => number): { windowStartHours?: number } {
  return from === null ? {} : { windowStartHours: Math.max(0, hoursOf(from)) }
}

/** Pumps placed or taken away, and entries that their writers put on the chart, oldest first. */
async function changesSince(db: DbOrTx, segmentId: number, startedAt: Date, until: Date): Promise<Change[]> {
  const from = new Date(startedAt.getTime() + START_MS)
  const [pumps, entries] = await Promise.all([
    listPlacedPumps(db, [segmentId]),
    listEntries(db, { segmentId, from, to: until, onChart: true, limit: 200 }),
  ])
  const inside = (at: Date | null): at is Date => at !== null && at > from && at < until
  return [
    ...pumps.flatMap(({ tag, startsAt, endsAt }) => [
      ...(inside(startsAt) ? [{ at: startsAt, what: `${tag} put on the segment` }] : []),
      ...(inside(endsAt) ? [{ at: endsAt, what: `${tag} taken off the segment` }] : []),
    ]),
    ...entries
      .filter(({ kind }) => CHANGING.includes(kind))
      .map(({ eventAt, text, amendments }) => ({ at: eventAt, what: amendments.at(-1)?.text ?? text })),
  ].sort((a, b) => a.at.getTime() - b.at.getTime())
}

/** Why a window that a reader chose cannot be used; null when it can. */
function refusedWindow(
  window: { from: Date; to: Date },
  changes: readonly Change[],
  hoursOf: (at: Date) => number,
): Forecast | null {
  const hours = hoursOf(window.to) - hoursOf(window.from)
  const change = changes.findLast(({ at }) => at > window.from && at < window.to)
  if (change !== undefined) {
    return {
      kind: 'refused',
      reason: 'pump-change',
      message: `The segment was handled inside the chosen window, at hour ${hoursOf(change.at).toFixed(1)} (${change.what}). The fit has to begin after it, with at least ${LEAST_HOURS} h to follow.`,
      tryAgainHours: hoursOf(change.at) + LEAST_HOURS,
    }
  }
  if (hours >= LEAST_HOURS) return null
  return {
    kind: 'refused',
    reason: 'too-few-hours',
    message: `The chosen window is ${Math.max(0, hours).toFixed(1)} h long; at least ${LEAST_HOURS} h are needed.`,
    tryAgainHours: Math.max(0, hoursOf(window.from)) + LEAST_HOURS,
  }
}

function hydrogenAt(
  model: NonNullable<ReturnType<typeof coldModel>>,
  hours: number,
  atM: number,
): number | null {
  const pa = predictPumpDown(model, { hours: [hours], atM }).byGasPa.H2[0]
  return pa === undefined ? null : nitrogenEquivalent({ H2: pa })
}

/** The fit of the window the forecast used, taken apart at the present hour. */
function partsOf(
  series: { hours: number[]; pa: number[] },
  result: Forecast,
  nowHours: number,
  hydrogenPa: number | null,
): Parts | null {
  try {
    const startHours = result.kind === 'forecast' ? result.windowHours[0] : Math.max(1, nowHours / 10)
    const fit = fitPumpDown(series, { startHours })
    return {
      alpha: fit.alpha,
      alphaSe: fit.alphaSe,
      fallingPa: fit.kPa * nowHours ** -fit.alpha,
      constantPa: fit.floorPa,
      constantUpperPa: fit.floorUpperPa,
      hydrogenPa,
    }
  } catch (error) {
    if (error instanceof PumpDownDataError) return null
    throw error
  }
}

/** Hours to the asked pressure: by the forecast, else if the fall went on as steeply as the fit allows. */
function earliestHours(
  result: Forecast,
  parts: Parts | null,
  nowHours: number,
  factor: number,
): number | null {
  if (result.kind === 'forecast') return result.low
  if (parts === null || factor <= 1) return null
  const steepest = parts.alpha + 2 * parts.alphaSe
  return steepest <= 0 ? null : nowHours * factor ** (1 / steepest)
}
