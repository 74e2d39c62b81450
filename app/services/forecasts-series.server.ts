/** Readings of one gauge over a stretch of time, as forecasts and isolation tests take them. */
import type { DbOrTx } from '../db/client.server.ts'
import { binReadings, factorAt, listFittingSpans, listMapSpans } from '../db/queries/readings.server.ts'

export interface SeriesPoint {
  /** Middle of the step. */
  at: Date
  /** Geometric mean, least and greatest usable value of the step, Pa as the gauge reads. */
  pa: number
  low: number
  high: number
}

/**
 * Mean pressures of a position in equal steps over [from, to], through the channel maps and factors in force at each
 * moment. What several channels say within one step counts together. Steps without usable readings are absent.
 */
export async function readGaugeSeries(
  db: DbOrTx,
  positionId: number,
  window: { from: Date; to: Date; stepSeconds: number },
): Promise<SeriesPoint[]> {
  const { from, stepSeconds } = window
  const to = new Date(window.to.getTime() + 1)
  const [spans, fittings] = await Promise.all([
    listMapSpans(db, [positionId], from, to),
    listFittingSpans(db, [positionId]),
  ])
  const bins = await binReadings(db, {
    channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
    from,
    to,
    binSeconds: stepSeconds,
    logarithmic: true,
  })
  const steps = new Map<number, { sumLn: number; count: number; low: number; high: number }>()
  for (const bin of bins) {
    const at = new Date(bin.atMs)
    const mapped = spans.some(
      (span) => span.channelId === bin.channelId && span.from <= at && (span.to === null || at < span.to),
    )
    if (!mapped) continue
    const factor = factorAt(fittings, positionId, at)
    const step = steps.get(bin.atMs) ?? { sumLn: 0, count: 0, low: Infinity, high: 0 }
    steps.set(bin.atMs, {
      sumLn: step.sumLn + bin.count * Math.log(bin.mean * factor),
      count: step.count + bin.count,
      low: Math.min(step.low, bin.min * factor),
      high: Math.max(step.high, bin.max * factor),
    })
  }
  return [...steps]
    .sort(([a], [b]) => a - b)
    .map(([atMs, { sumLn, count, low, high }]) => ({
      at: new Date(atMs + stepSeconds * 500),
      pa: Math.exp(sumLn / count),
      low,
      high,
    }))
}

/** Length of a step, s, that makes at most `most` of a stretch; whole minutes, so that few are split by the logger's own. */
export function stepSecondsFor(from: Date, to: Date, most: number): number {
  return Math.max(60, Math.ceil((to.getTime() - from.getTime()) / 60_000 / most) * 60)
}
