/** Forecasts of record: kept by an engineer, judged by the worker, counted for everybody. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  closeForecast,
  type ForecastRow,
  insertForecast,
  listForecasts,
  listOutcomes,
} from '../db/queries/forecasts.server.ts'
import { listPlacedPumps, listStates } from '../db/queries/segments.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { type HitRecord, hitRecord, judgeForecast } from '../domain/forecast-records.ts'
import { SEGMENT_STATES } from '../domain/segment-states.ts'
import {
  type ForecastAsk,
  forecastSegment,
  readForecastSubject,
  type SegmentForecast,
} from './forecasts-segment.server.ts'
import { readGaugeSeries } from './forecasts-series.server.ts'
import { writeRecord } from './record.server.ts'

export type { ForecastRow }

const HOUR_MS = 3_600_000
/** Steps in which the readings after a forecast are looked at, s. */
const JUDGE_STEP_S = 600
/** A range that ends beyond what the calendar holds has no end. */
const LONGEST_HOURS = 50 * 8766
const SHOWN = 30

/**
 * Puts the forecast that the page shows on record: it is computed anew from the same question.
 *
 * @returns the forecast's id
 * @throws DomainError forbidden, not-found, not-acceptable-now (there is no forecast, or the pressure is reached already)
 */
export async function recordForecast(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  ask: ForecastAsk & { targetPa: number; note: string },
): Promise<number> {
  demand(actor, 'forecast:record')
  const subject = await readForecastSubject(db, tag, now)
  const forecast = await forecastSegment(db, subject, now, ask)
  if (forecast === null) {
    throw new DomainError(
      'not-acceptable-now',
      `${tag} is "${SEGMENT_STATES[subject.segment.state].label}"; forecasts of record are made of pump-downs with readings.`,
    )
  }
  const row = recordOf(forecast, ask.note)
  if (row === null) {
    const why =
      forecast.result.kind === 'refused' ? forecast.result.message : 'The pressure is reached already.'
    throw new DomainError('not-acceptable-now', `There is no forecast to keep. ${why}`)
  }
  return tx(db, async (inside) => {
    const id = await insertForecast(inside, {
      ...row,
      segmentId: subject.segment.id,
      madeBy: actor.personId,
      madeAt: now,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'forecast put on record',
      subjectKind: 'forecast',
      subjectId: String(id),
      after: {
        segment: tag,
        targetPa: row.targetPa,
        medianAt: row.medianAt.toISOString(),
        lowAt: row.lowAt.toISOString(),
        highAt: row.highAt?.toISOString() ?? null,
      },
    })
    return id
  })
}

/** What is kept of a forecast; null where there is nothing to keep. */
export function recordOf(forecast: SegmentForecast, note: string) {
  const { result, startedAt, until, window } = forecast
  const at = (hours: number) => new Date(startedAt.getTime() + hours * HOUR_MS)
  if (result.kind === 'refused' || at(result.high) <= until) return null
  return {
    positionId: forecast.gauge.id,
    startedAt,
    windowFrom: at(result.windowHours[0]),
    windowTo: at(result.windowHours[1]),
    targetPa: forecast.askedPa,
    medianAt: at(Math.min(result.hours, LONGEST_HOURS)),
    lowAt: at(Math.min(result.low, LONGEST_HOURS)),
    highAt: result.high > LONGEST_HOURS ? null : at(result.high),
    note,
    model: {
      gauge: forecast.gauge.tag,
      hours: result.hours,
      lowHours: result.low,
      highHours: result.high,
      windowHours: result.windowHours,
      windowChosen: window !== null,
      alpha: result.alpha,
      alphaSe: result.alphaSe,
      floorPa: result.floorPa,
      floorUpperPa: result.floorUpperPa,
      points: result.points,
      rmsLn: result.rmsLn,
    },
  }
}

/**
 * Judges every open forecast of record that can be judged by the readings there are.
 *
 * @returns how many were judged
 */
export async function judgeForecasts(db: DbOrTx, now: Date, signal?: AbortSignal): Promise<number> {
  let judged = 0
  for (const forecast of await listForecasts(db, { open: true })) {
    if (signal?.aborted) break
    const { segmentId, positionId, madeAt } = forecast
    const [states, pumps, steps] = await Promise.all([
      listStates(db, segmentId),
      listPlacedPumps(db, [segmentId]),
      readGaugeSeries(db, positionId, { from: madeAt, to: now, stepSeconds: JUDGE_STEP_S }),
    ])
    const after = (at: Date | null): at is Date => at !== null && at > madeAt && at <= now
    const handled = [
      ...states
        .filter(({ since }) => after(since))
        .map(({ state, since }) => ({ at: since, what: `state set to "${SEGMENT_STATES[state].label}"` })),
      ...pumps.flatMap(({ tag, startsAt, endsAt }) => [
        ...(after(startsAt) ? [{ at: startsAt, what: `${tag} put on the segment` }] : []),
        ...(after(endsAt) ? [{ at: endsAt, what: `${tag} taken off the segment` }] : []),
      ]),
    ].sort((a, b) => a.at.getTime() - b.at.getTime())
    const answer = judgeForecast(forecast, steps, handled, JUDGE_STEP_S * 1000)
    if (answer === null) continue
    const closed = await closeForecast(db, forecast.id, {
      outcome: answer.outcome,
      reachedAt: answer.reachedAt,
      judgedAt: now,
      outcomeReason: answer.reason.slice(0, 500),
    })
    if (closed) judged += 1
  }
  return judged
}

/** Forecasts of record of one segment or of all, the last made first, and the record of hits over all. */
export async function readForecastRecords(
  db: DbOrTx,
  segmentId?: number,
): Promise<{ records: ForecastRow[]; hits: HitRecord }> {
  const [records, outcomes] = await Promise.all([
    listForecasts(db, { ...(segmentId === undefined ? {} : { segmentId }), limit: SHOWN }),
    listOutcomes(db),
  ])
  return { records, hits: hitRecord(outcomes) }
}
