/** The page of one segment's forecast: the question asked of it, the pressure in service, and what was forecast before. */
import type { Db } from '../db/client.server.ts'
import { DomainError } from '../domain/errors.ts'
import type { HitRecord } from '../domain/forecast-records.ts'
import type { SegmentState } from '../domain/segment-states.ts'
import { type ForecastRow, readForecastRecords } from './forecasts.server.ts'
import { type SegmentTrend, trendOf } from './forecasts-page.server.ts'
import {
  type ForecastAsk,
  forecastSegment,
  readForecastSubject,
  type SegmentForecast,
} from './forecasts-segment.server.ts'
import { readStandings } from './standing.server.ts'

export interface ForecastDetail {
  tag: string
  state: SegmentState
  targetPa: number | null
  limitPa: number | null
  /** Null unless the segment is being pumped down and its gauge has readings. */
  forecast: SegmentForecast | null
  /** The same for the pressure in service. */
  inService: Pick<SegmentForecast, 'askedPa' | 'result' | 'binding'> | null
  trend: SegmentTrend | null
  records: ForecastRow[]
  hits: HitRecord
}

/** @throws DomainError not-found */
export async function readForecastDetail(
  db: Db,
  tag: string,
  now: Date,
  ask: ForecastAsk,
): Promise<ForecastDetail> {
  const [[standing], subject] = await Promise.all([
    readStandings(db, now, tag),
    readForecastSubject(db, tag, now),
  ])
  if (standing === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const forecast = await forecastSegment(db, subject, now, ask)
  const service =
    forecast === null || subject.targetPa === null || forecast.askedPa === subject.targetPa
      ? null
      : await forecastSegment(db, subject, now, { ...ask, targetPa: subject.targetPa })
  const [record, trend] = await Promise.all([
    readForecastRecords(db, subject.segment.id),
    forecast === null ? trendOf(db, standing, now) : null,
  ])
  return {
    tag,
    state: subject.segment.state,
    targetPa: subject.targetPa,
    limitPa: subject.limitPa,
    forecast,
    inService:
      service === null
        ? null
        : { askedPa: service.askedPa, result: service.result, binding: service.binding },
    trend,
    ...record,
  }
}
