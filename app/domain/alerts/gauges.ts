/** A14 and A15: gauges against each other and against a forecast, by means over an hour or so. */
import { type Bin, Bins } from './bins.ts'
import type { GaugesFacts, PredictionFacts } from './facts.ts'
import {
  type Case,
  type Change,
  EVALUABLE,
  figure,
  type Judge,
  kept,
  notEvaluable,
  quietTimes,
} from './judge.ts'
import { BACK, BETWEEN, BEYOND, Latch, UNKNOWN, type Zone } from './latch.ts'
import { figureText, firstAt, measured, silenceText, utcText } from './series.ts'
import { walkTogether } from './together.ts'

/** A delay as it is said ends with the last mean of the run; the run itself begins at the start of its first. */
function delayMs(seconds: number, binMs: number): number {
  return Math.max(0, 1000 * seconds - binMs)
}

function logOf(value: number): number {
  return value > 0 ? Math.log10(value) : Number.NaN
}

/** A14: largest ratio between gauges, each over what it is expected to read. */
export function judgeGauges(of: Case<GaugesFacts>): Judge {
  const { content, memory } = of
  const { gauges, disturbances } = of.facts
  const ratio = figure(of, 'ratio')
  const clearRatio = figure(of, 'clearRatio')
  const binMs = 1000 * figure(of, 'binS')
  const all = gauges.map(({ series }) => series)
  const bins = all.map((series) => new Bins(binMs, 1, series.periodS, kept(kept(memory, 'bins'), series.tag)))
  const latch = new Latch(
    delayMs(content.onDelayS, binMs),
    delayMs(content.offDelayS, binMs),
    3 * binMs,
    kept(memory, 'latch'),
  )
  let ranFromMs = Number.NEGATIVE_INFINITY

  function judgeBins(at: number, changes: Change[]): void {
    const index = Math.floor(at / binMs)
    const closed = bins.map((one) => (one.openEndMs <= at ? one.close() : null))
    const last = Math.max(...closed.map((bin) => bin?.index ?? -1))
    if (last < 0 || last >= index) return
    let high = -1
    let low = -1
    let highLog = Number.NEGATIVE_INFINITY
    let lowLog = Number.POSITIVE_INFINITY
    for (const [k, bin] of closed.entries()) {
      if (bin === null || bin.index !== last || bin.coveredMs < content.coverage * binMs) continue
      const log = bin.sum / bin.count - Math.log10(gauges[k]?.expected ?? Number.NaN)
      if (log > highLog) {
        highLog = log
        high = k
      }
      if (log < lowLog) {
        lowLog = log
        low = k
      }
    }
    const apart = 10 ** (highLog - lowLog)
    const zone: Zone = high === low ? UNKNOWN : apart > ratio ? BEYOND : apart < clearRatio ? BACK : BETWEEN
    const turned = latch.step(last * binMs, zone, apart)
    if (turned === 0) return
    const names = [all[high]?.tag, all[low]?.tag] as const
    changes.push({
      part: 'ratio',
      on: turned === 1,
      atMs: at,
      sinceMs: latch.since(turned, at),
      priority: content.priority,
      value: apart,
      limit: turned === 1 ? ratio : clearRatio,
      unit: '',
      what: `gauges apart by ${figureText(apart, '')} times, ${names[0]} above ${names[1]} (limit ${figureText(ratio, '')})`,
      text: `${names[0]} lies ${figureText(apart, '')} times above ${names[1]}, each over what it is expected to read. The lower one is not the better vacuum by that.`,
      more: { high: names[0], low: names[1] },
    })
  }

  return {
    run(fromMs, untilMs) {
      ranFromMs = fromMs
      const changes: Change[] = []
      const quiet = quietTimes(disturbances, figure(of, 'quietAfterS'))
      let nextMs = Math.min(...bins.map((one) => one.openEndMs))
      walkTogether(
        all,
        fromMs,
        untilMs,
        (k, i, at) => {
          if (at >= nextMs) judgeBins(at, changes)
          bins[k]!.add(at, quiet(at) ? Number.NaN : logOf(measured(all[k]!, i)))
          nextMs = (Math.floor(at / binMs) + 1) * binMs
        },
        () => undefined,
      )
      return changes
    },
    verdict(untilMs) {
      const first = all[0]
      if (first === undefined || all.length < 2)
        return notEvaluable('The segment has fewer than two gauges to compare.')
      const known = latch.knownMs
      if (known !== null && untilMs - known <= 3 * binMs) return EVALUABLE
      return notEvaluable(
        `Fewer than two gauges have good readings for ${Math.round(100 * content.coverage)} % of ${binMs / 60_000} min. ${silenceText(first, known, ranFromMs, untilMs)}`,
      )
    },
    memory: () => ({
      latch: latch.memory(),
      bins: Object.fromEntries(all.map(({ tag }, k) => [tag, bins[k]?.memory()])),
    }),
  }
}

interface Bounds {
  low: number
  high: number
}

/** Bounds of the band at an instant, straight in log p; null outside it. */
function bandAt(band: NonNullable<PredictionFacts['band']>, ms: number): Bounds | null {
  const { at, low, high } = band
  const right = firstAt(at, ms)
  const rightMs = at[right]
  if (rightMs === undefined || (right === 0 && rightMs > ms)) return null
  if (rightMs === ms) return { low: low[right] as number, high: high[right] as number }
  const left = right - 1
  const share = (ms - (at[left] as number)) / (rightMs - (at[left] as number))
  const between = (values: ArrayLike<number>) =>
    10 ** ((1 - share) * Math.log10(values[left] as number) + share * Math.log10(values[right] as number))
  return { low: between(low), high: between(high) }
}

/** A15: above the band is told with the rule's priority, below it with the lowest: it may be the gauge. */
export function judgePrediction(of: Case<PredictionFacts>): Judge {
  const { content, memory } = of
  const { series, band, disturbances } = of.facts
  const binMs = 1000 * figure(of, 'binS')
  const youngMs = 1000 * figure(of, 'youngS')
  const bins = new Bins(binMs, 1, series.periodS, kept(memory, 'bins'))
  const latchOf = (side: string) =>
    new Latch(
      delayMs(content.onDelayS, binMs),
      delayMs(content.offDelayS, binMs),
      3 * binMs,
      kept(memory, side),
    )
  const sides = [
    { side: 'above', latch: latchOf('above') },
    { side: 'below', latch: latchOf('below') },
  ] as const
  let ranFromMs = Number.NEGATIVE_INFINITY

  function judgeBin(closedBy: number, changes: Change[]): void {
    const bin = bins.close() as Bin
    const begins = bin.index * binMs
    if (band === null || begins < band.madeMs + youngMs) return
    const bounds = bin.coveredMs < content.coverage * binMs ? null : bandAt(band, begins + binMs / 2)
    if (bounds === null) return
    const mean = 10 ** (bin.sum / bin.count)
    for (const { side, latch } of sides) {
      const beyond = side === 'above' ? mean > bounds.high : mean < bounds.low
      // Inside again, or already on the other side: either way no longer on this one.
      const turned = latch.step(begins, beyond ? BEYOND : BACK, mean, side === 'above' ? 1 : -1)
      if (turned === 0) continue
      const limit = side === 'above' ? bounds.high : bounds.low
      const band90 = `${figureText(bounds.low, '')} to ${figureText(bounds.high, 'Pa')}`
      changes.push({
        part: side,
        on: turned === 1,
        atMs: closedBy,
        sinceMs: latch.since(turned, closedBy),
        priority: side === 'above' ? content.priority : 'low',
        value: mean,
        limit,
        unit: 'Pa',
        what:
          turned === 1
            ? `${series.tag} ${side} its forecast, ${figureText(mean, 'Pa')} (band ${band90})`
            : `${series.tag} no longer ${side} its forecast`,
        text: `${series.tag} reads ${figureText(mean, 'Pa')}; the forecast of ${utcText(band.madeMs)} has ${band90} for nine in ten.${side === 'below' && turned === 1 ? ' A low reading may be the gauge.' : ''}`,
      })
    }
  }

  return {
    run(fromMs, untilMs) {
      ranFromMs = fromMs
      const changes: Change[] = []
      const quiet = quietTimes(disturbances, figure(of, 'quietAfterS'))
      const end = firstAt(series.at, untilMs)
      for (let i = firstAt(series.at, fromMs); i < end; i += 1) {
        const at = series.at[i] as number
        if (bins.openEndMs <= at) judgeBin(at, changes)
        bins.add(at, quiet(at) ? Number.NaN : logOf(measured(series, i)))
      }
      return changes
    },
    verdict(untilMs) {
      if (band === null) return notEvaluable(`${series.tag}: there is no forecast to hold it against.`)
      if (untilMs < band.madeMs + youngMs) {
        return notEvaluable(`${series.tag}: the forecast of ${utcText(band.madeMs)} is too young.`)
      }
      if (bandAt(band, untilMs) === null)
        return notEvaluable(`${series.tag}: the forecast does not reach ${utcText(untilMs)}.`)
      const known = sides[0].latch.knownMs
      if (known !== null && untilMs - known <= 3 * binMs) return EVALUABLE
      return notEvaluable(silenceText(series, known, ranFromMs, untilMs))
    },
    memory: () => ({ bins: bins.memory(), above: sides[0].latch.memory(), below: sides[1].latch.memory() }),
  }
}
