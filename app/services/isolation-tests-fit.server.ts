/** From readings to the result of an isolation test: the curve, the fit of a window, or why a window cannot be fitted. */
import type { DbOrTx } from '../db/client.server.ts'
import { binReadings, listMapSpans, listPositions, type PositionRow } from '../db/queries/readings.server.ts'
import {
  listLimits,
  listPlacedPumps,
  listSegments,
  listStates,
  type SegmentWithState,
  type StateSpan,
} from '../db/queries/segments.server.ts'
import { DomainError } from '../domain/errors.ts'
import {
  fitIsolation,
  type IsolationFinding,
  type Opening,
  openingsOf,
  windowBefore,
} from '../domain/isolation-tests.ts'
import { IsolationDataError } from '../physics/isolation.ts'
import { readGaugeSeries, stepSecondsFor } from './forecasts-series.server.ts'
import { limitFor } from './standing.server.ts'

/**
 * Steps of a fit, of the search for an opening, and of a drawn curve at most. Fits take fewer: the scatter of a gauge
 * wanders over an hour or so, and only steps long enough for neighbours to agree let the fit count that in.
 */
const FIT_STEPS = 72
const SEARCH_STEPS = 720
const CURVE_STEPS = 360
const HOUR_MS = 3_600_000

export interface IsolationWindow {
  closedAt: Date
  fitFrom: Date
  fitTo: Date
}

export interface IsolationSubject {
  segment: SegmentWithState
  volumeM3: number
  /** Hot-cathode gauges of the segment. */
  gauges: PositionRow[]
  states: StateSpan[]
  /** Limit of the rise, Pa/h; null when none is set. */
  limitPaPerHour: number | null
}

/** A segment as an isolation test needs it. @throws DomainError not-found */
export async function readSubject(db: DbOrTx, tag: string, now: Date): Promise<IsolationSubject> {
  const segment = (await listSegments(db, now)).find((each) => each.tag === tag)
  if (segment === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const [gauges, states, limits] = await Promise.all([
    listPositions(db, { segmentId: segment.id, kinds: ['hot-cathode'] }),
    listStates(db, segment.id),
    listLimits(db, now),
  ])
  return {
    segment,
    volumeM3: (Math.PI / 4) * segment.innerDiameterM ** 2 * (segment.endM - segment.startM),
    gauges,
    states,
    limitPaPerHour: limitFor(limits, 'isolation-rise', segment.id)?.value ?? null,
  }
}

export type WindowAnswer =
  | { kind: 'fitted'; finding: IsolationFinding }
  | { kind: 'refused'; message: string; opening: Opening | null; offer: { from: Date; to: Date } | null }

/** Fits the readings of a gauge in a window, or says why they cannot be fitted and which window can. */
export async function fitWindow(
  db: DbOrTx,
  subject: IsolationSubject,
  gauge: PositionRow,
  window: IsolationWindow,
): Promise<WindowAnswer> {
  const { segment, states, volumeM3 } = subject
  const { closedAt, fitFrom, fitTo } = window
  if (!(closedAt <= fitFrom && fitFrom < fitTo)) {
    return refusal('The fit has to begin when the valve was closed or later, and to end after it began.')
  }
  const pumps = await listPlacedPumps(db, [segment.id])
  const [opening] = openingsOf(closedAt, fitTo, { states, pumps })
  if (opening !== undefined) return refusedAcross(opening, window)
  const searchSeconds = stepSecondsFor(fitFrom, fitTo, SEARCH_STEPS)
  const fitSeconds = stepSecondsFor(fitFrom, fitTo, FIT_STEPS)
  const series = (stepSeconds: number) =>
    readGaugeSeries(db, gauge.id, { from: fitFrom, to: fitTo, stepSeconds })
  const [fine, coarse, temperatureC] = await Promise.all([
    series(searchSeconds),
    series(fitSeconds),
    temperaturesWithin(db, segment.id, fitFrom, fitTo),
  ])
  const about = { gauge: gauge.tag, volumeM3, temperatureC }
  try {
    // Only fine steps show the minute of an opening; a fall is an error of the fit.
    fitIsolation(fine, { ...about, binSeconds: searchSeconds })
    return { kind: 'fitted', finding: fitIsolation(coarse, { ...about, binSeconds: fitSeconds }) }
  } catch (error) {
    if (!(error instanceof IsolationDataError)) throw error
    const first = fine[0]
    if (error.reason === 'valve-reopened' && error.atSeconds !== null && first !== undefined) {
      // The median over three steps sees the fall one step late.
      const fell = new Date(first.at.getTime() + error.atSeconds * 1000 - 1.5 * searchSeconds * 1000)
      return refusedAcross({ at: fell, what: 'pressure fell, as it does when a valve is opened' }, window)
    }
    return refusal(
      `${gauge.tag} has ${fine.length} usable readings in this window; at least 8 are needed. Choose another gauge or a longer window.`,
    )
  }
}

function refusal(message: string): WindowAnswer {
  return { kind: 'refused', message, opening: null, offer: null }
}

function refusedAcross(opening: Opening, window: IsolationWindow): WindowAnswer {
  const offer = windowBefore(opening.at, window)
  return {
    kind: 'refused',
    message:
      'The window runs across the end of the isolation. A closed volume is fitted only while it is closed.',
    opening,
    offer: offer.from < offer.to ? offer : null,
  }
}

/** Coldest and warmest hourly mean of the segment's thermocouples; null without readings. */
async function temperaturesWithin(
  db: DbOrTx,
  segmentId: number,
  from: Date,
  to: Date,
): Promise<IsolationFinding['temperatureC']> {
  const positions = await listPositions(db, { segmentId, kinds: ['thermocouple'] })
  const spans = await listMapSpans(
    db,
    positions.map(({ id }) => id),
    from,
    to,
  )
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from,
    to,
    binSeconds: 3600,
    logarithmic: false,
  })
  const hours = new Map<number, { sum: number; count: number }>()
  for (const { atMs, mean } of bins) {
    const { sum, count } = hours.get(atMs) ?? { sum: 0, count: 0 }
    hours.set(atMs, { sum: sum + mean, count: count + 1 })
  }
  const means = [...hours.values()].map(({ sum, count }) => sum / count)
  return means.length === 0 ? null : { low: Math.min(...means), high: Math.max(...means) }
}

export interface RiseCurve {
  points: { at: Date; pa: number }[]
  /** What ended the isolation, by the states and pumps; null while it goes on. */
  opening: Opening | null
}

/** The curve around a window, for drawing: from shortly before the closing to shortly after its end or the window's. */
export async function readRise(
  db: DbOrTx,
  subject: IsolationSubject,
  gauge: PositionRow,
  window: IsolationWindow,
  now: Date,
): Promise<RiseCurve> {
  const pumps = await listPlacedPumps(db, [subject.segment.id])
  const [opening] = openingsOf(window.closedAt, now, { states: subject.states, pumps })
  const length = Math.max(HOUR_MS, window.fitTo.getTime() - window.closedAt.getTime())
  const margin = length / 12
  const fitTo = window.fitTo.getTime()
  const opened = opening?.at.getTime() ?? fitTo
  // An opening not far behind the window is shown with it: it says why the window ends there.
  const end = opened - fitTo < length / 2 ? Math.max(fitTo, opened) : fitTo
  const from = new Date(window.closedAt.getTime() - margin)
  const to = new Date(Math.min(now.getTime(), end + margin))
  const points = await readGaugeSeries(db, gauge.id, {
    from,
    to,
    stepSeconds: stepSecondsFor(from, to, CURVE_STEPS),
  })
  return {
    points: points.map(({ at, pa }) => ({ at, pa })),
    opening: opening !== undefined && opening.at <= to ? opening : null,
  }
}
