/** The forecasts of all segments on one page, and of the facility as a whole. */
import type { Db } from '../db/client.server.ts'
import { countSupplySets } from '../db/queries/forecasts.server.ts'
import { listLimits, listStates } from '../db/queries/segments.server.ts'
import {
  durationsOf,
  type FacilityOutlook,
  facilityOutlook,
  outlookOf,
  type SegmentOutlook,
  weeksToLimit,
} from '../domain/facility-forecast.ts'
import type { HitRecord } from '../domain/forecast-records.ts'
import type { Verdict } from '../domain/segment-standing.ts'
import { SEGMENT_STATES, type SegmentState } from '../domain/segment-states.ts'
import { weeklyChange } from '../domain/trend.ts'
import { type ForecastRow, readForecastRecords } from './forecasts.server.ts'
import { forecastSegment, readForecastSubject, type SegmentForecast } from './forecasts-segment.server.ts'
import { readGaugeSeries } from './forecasts-series.server.ts'
import { limitFor, readStandings, type StandingSegment } from './standing.server.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS
const TREND_DAYS = 30
const TREND_STEP_S = 7200
/** Growth that is worth a line, a week; below it is the scatter of gauges. */
const GROWS = 0.01
/** A limit farther away than this is not worth naming, weeks. */
const FAR_WEEKS = 104
const USUAL_SOAK_H = 168

export interface SegmentTrend {
  gauge: string
  /** Relative change a week over the last thirty days; null without enough readings. */
  perWeek: number | null
  paNow: number | null
  limitPa: number | null
  weeksToLimit: number | null
}

export interface ForecastLine {
  tag: string
  state: SegmentState
  verdict: Verdict
  paNow: number | null
  targetPa: number | null
  /** Of a pump-down: the pressure in service and the next one on the way. */
  toTarget: Outcome | null
  toNext: Outcome | null
  trend: SegmentTrend | null
}

export interface Outcome {
  pa: number
  /** Instants of the 80 % range and the middle; null where refused. */
  at: { low: Date; median: Date; high: Date } | null
  reason: string
  tryAgainAt: Date | null
  binding: string | null
}

export interface ForecastsPageData {
  lines: ForecastLine[]
  trends: (SegmentTrend & { tag: string })[]
  facility: FacilityOutlook & {
    from: Date | null
    to: Date | null
    segments: SegmentOutlook[]
    neededAtTarget: number
    assumptions: string[]
  }
  records: ForecastRow[]
  hits: HitRecord
}

/** All of it at an instant. */
export async function readForecastsPage(db: Db, now: Date): Promise<ForecastsPageData> {
  const [standings, limits, supplies, record] = await Promise.all([
    readStandings(db, now),
    listLimits(db, now),
    countSupplySets(db),
    readForecastRecords(db),
  ])
  const states = await Promise.all(standings.map(({ segment }) => listStates(db, segment.id)))
  const main = standings.filter(({ segment }) => segment.lineCode === standings[0]?.segment.lineCode)
  const durations = durationsOf(states, limitFor(limits, 'bake-hours', null)?.value ?? USUAL_SOAK_H)
  const outlooks = main.map(({ segment, standing }) =>
    outlookOf({ ...segment, verdict: standing.verdict }, durations, now),
  )
  const trends = new Map<string, SegmentTrend>()
  for (const one of standings.filter(isQuietlyInService)) {
    const trend = await trendOf(db, one, now)
    if (trend !== null) trends.set(one.segment.tag, trend)
  }
  const lines: ForecastLine[] = []
  for (const one of standings.filter(({ segment, standing }) => isOpen(segment.state, standing.verdict))) {
    lines.push(await lineOf(db, one, now, trends.get(one.segment.tag) ?? null))
  }
  const outlook = facilityOutlook(outlooks)
  const at = (hours: number | undefined) =>
    hours === undefined ? null : new Date(now.getTime() + hours * HOUR_MS)
  return {
    lines,
    trends: [...trends].flatMap(([tag, trend]) =>
      (trend.perWeek ?? 0) >= GROWS && (trend.weeksToLimit ?? Infinity) <= FAR_WEEKS
        ? [{ tag, ...trend }]
        : [],
    ),
    facility: {
      ...outlook,
      from: at(outlook.hours?.low),
      to: at(outlook.hours?.high),
      segments: outlooks.filter(({ hours }) => hours === null || hours.high > 0),
      neededAtTarget: limitFor(limits, 'available-at-target', null)?.value ?? main.length,
      assumptions: assumptionsOf(outlooks, supplies, limitFor(limits, 'power-cap-day', null)?.value ?? null),
    },
    ...record,
  }
}

/** A reading under question, such as one of crossed channels, has no trend worth naming. */
function isQuietlyInService({ segment, standing }: StandingSegment): boolean {
  return segment.state === 'in-service' && standing.questions.length === 0
}

function isOpen(state: SegmentState, verdict: Verdict): boolean {
  return state === 'pumping' || verdict === 'above-target' || verdict === 'over-limit'
}

/** Change of the cross gauge over the last thirty days; null where the segment has no such gauge. */
export async function trendOf(db: Db, one: StandingSegment, now: Date): Promise<SegmentTrend | null> {
  const hot = one.gauges.filter(({ position }) => position.kind === 'hot-cathode')
  const gauge = hot.find(({ position }) => position.tag.endsWith('B')) ?? hot[0]
  if (gauge === undefined) return null
  // Whole steps of UTC, which is what rollups are kept for.
  const stepMs = TREND_STEP_S * 1000
  const from = new Date(Math.floor((now.getTime() - TREND_DAYS * DAY_MS) / stepMs) * stepMs)
  const points = await readGaugeSeries(db, gauge.position.id, { from, to: now, stepSeconds: TREND_STEP_S })
  const values = new Array<number | null>(Math.ceil((now.getTime() - from.getTime()) / stepMs) + 1).fill(null)
  for (const { at, pa } of points) values[Math.floor((at.getTime() - from.getTime()) / stepMs)] = pa
  const perWeek = weeklyChange(values, TREND_STEP_S)
  const paNow = gauge.value
  const limitPa = one.limit?.value ?? null
  return {
    gauge: gauge.position.tag,
    perWeek,
    paNow,
    limitPa,
    weeksToLimit:
      perWeek === null || perWeek < GROWS || paNow === null || limitPa === null
        ? null
        : weeksToLimit(paNow, perWeek, limitPa),
  }
}

async function lineOf(
  db: Db,
  one: StandingSegment,
  now: Date,
  trend: SegmentTrend | null,
): Promise<ForecastLine> {
  const { segment, standing, target } = one
  const base = {
    tag: segment.tag,
    state: segment.state,
    verdict: standing.verdict,
    paNow: standing.headline?.value ?? null,
    targetPa: target?.value ?? null,
    trend,
  }
  if (segment.state !== 'pumping') return { ...base, toTarget: null, toNext: null }
  const subject = await readForecastSubject(db, segment.tag, now)
  const ask = async (targetPa: number | null) => {
    const forecast = await forecastSegment(db, subject, now, { targetPa, from: null, to: null })
    return forecast === null ? null : outcomeOf(forecast)
  }
  return {
    ...base,
    toTarget: base.targetPa === null ? null : await ask(base.targetPa),
    toNext: await ask(null),
  }
}

function outcomeOf({ result, startedAt, askedPa, binding }: SegmentForecast): Outcome {
  const at = (hours: number) => new Date(startedAt.getTime() + hours * HOUR_MS)
  const refused = result.kind === 'refused'
  return {
    pa: askedPa,
    at: refused ? null : { low: at(result.low), median: at(result.hours), high: at(result.high) },
    reason: refused ? result.message : '',
    tryAgainAt: refused && result.tryAgainHours !== null ? at(result.tryAgainHours) : null,
    binding: binding?.text ?? null,
  }
}

function assumptionsOf(
  outlooks: readonly SegmentOutlook[],
  supplies: number,
  capKW: number | null,
): string[] {
  const toHeat = outlooks.filter(
    ({ state, hours }) => !SEGMENT_STATES[state].hot && (hours?.high ?? 0) > USUAL_SOAK_H,
  )
  const heated = outlooks.filter(({ state }) => state === 'heating' || state === 'soak')
  const cap = capKW === null ? 'the power cap' : `the power cap of ${capKW} kW by day`
  return [
    'Every state lasts between the shortest and the longest it has lasted here so far; bakes that were broken off are left out.',
    'Crew: one is there for every ramp and every opening on the day it is wanted; nights, holidays and permits cost no days.',
    `Power: ${toHeat.length} more ${toHeat.length === 1 ? 'segment' : 'segments'} to heat${toHeat.length === 0 ? '' : ` (${toHeat.map(({ tag }) => tag).join(', ')})`} and ${heated.length} under heat, ${supplies} supply sets. None waits for a set or for ${cap}; the schedule of bakes says whether that can be.`,
    'What was vented or never baked goes through a bake; a leak that is being hunted is closed without opening the segment.',
    'Nothing breaks.',
  ]
}
