/** Curves of a segment's gauges over the stretch of time its page shows, with the marks that belong on them. */
import type { Db } from '../db/client.server.ts'
import { listEntries } from '../db/queries/logbook.server.ts'
import { binReadings, factorAt, listFittingSpans, listMapSpans } from '../db/queries/readings.server.ts'
import { bucketStart } from '../domain/rollups.ts'
import { weeklyChange } from '../domain/trend.ts'
import type { StandingSegment } from './standing.server.ts'

const DAY_MS = 86_400_000
const HISTORY_DAYS = 30
/** About as many steps as a chart has columns to spare. */
const STEPS = 360
const SHORTEST_STEP_S = 60
const HISTORY_STEP_S = (HISTORY_DAYS * 86_400) / STEPS
const MARKS_SHOWN = 20

export interface GaugeCurve {
  tag: string
  kind: string
  /** Geometric mean, least and greatest usable value of each step; null where there is none. */
  mean: (number | null)[]
  min: (number | null)[]
  max: (number | null)[]
}

export interface Curves {
  kind: 'pump-down' | 'history'
  from: Date
  to: Date
  stepSeconds: number
  gauges: GaugeCurve[]
  marks: { at: Date; text: string; entryId: number }[]
  /** Relative change of the cross gauge per week; null without enough data or during a pump-down. */
  perWeek: number | null
}

/** The pump-down since it began while the segment is pumping, else the last thirty days. */
export async function readCurves(db: Db, { segment, gauges }: StandingSegment, now: Date): Promise<Curves> {
  const pumpDown = segment.state === 'pumping' && segment.since !== null
  // Thirty days in whole steps of UTC, which is what rollups are kept for.
  const from =
    pumpDown && segment.since !== null
      ? segment.since
      : new Date(bucketStart(now.getTime() - HISTORY_DAYS * DAY_MS, HISTORY_STEP_S))
  const to = new Date(now.getTime() + 1)
  const stepSeconds = pumpDown
    ? Math.max(SHORTEST_STEP_S, Math.ceil((to.getTime() - from.getTime()) / 1000 / STEPS))
    : HISTORY_STEP_S
  const steps = Math.ceil((to.getTime() - from.getTime()) / 1000 / stepSeconds)
  const shown = gauges.filter(({ position }) => position.kind !== 'thermal-conductivity')
  const ids = shown.map(({ position }) => position.id)
  const [spans, fittings, entries] = await Promise.all([
    listMapSpans(db, ids, from, to),
    listFittingSpans(db, ids),
    listEntries(db, { segmentId: segment.id, from, to, onChart: true, limit: MARKS_SHOWN }),
  ])
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from,
    to,
    binSeconds: stepSeconds,
    logarithmic: true,
  })
  const curves = shown.map(({ position }): GaugeCurve => {
    const empty = () => new Array<number | null>(steps).fill(null)
    const curve = { tag: position.tag, kind: position.kind, mean: empty(), min: empty(), max: empty() }
    for (const span of spans.filter(({ positionId }) => positionId === position.id)) {
      for (const bin of bins) {
        const at = new Date(bin.atMs)
        if (bin.channelId !== span.channelId || at < span.from || (span.to !== null && at >= span.to))
          continue
        const step = Math.round((bin.atMs - from.getTime()) / 1000 / stepSeconds)
        const factor = factorAt(fittings, position.id, at)
        if (step < 0 || step >= steps) continue
        curve.mean[step] = bin.mean * factor
        curve.min[step] = bin.min * factor
        curve.max[step] = bin.max * factor
      }
    }
    return curve
  })
  const cross = curves.find(({ tag, kind }) => kind === 'hot-cathode' && tag.endsWith('B'))
  return {
    kind: pumpDown ? 'pump-down' : 'history',
    from,
    to: now,
    stepSeconds,
    gauges: curves,
    marks: entries.map(({ id, eventAt, text, amendments }) => ({
      at: eventAt,
      text: amendments.at(-1)?.text ?? text,
      entryId: id,
    })),
    perWeek: pumpDown || cross === undefined ? null : weeklyChange(cross.mean, stepSeconds),
  }
}
