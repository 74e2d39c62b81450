/** A3, A4 and A9: how fast it changes, by a slope that single bursts do not carry away. */
import { type Bin, Bins, medianSlope } from './bins.ts'
import type { RampFacts, Series, SeriesFacts } from './facts.ts'
import {
  type Case,
  type Change,
  EVALUABLE,
  figure,
  type Judge,
  kept,
  lastDisturbance,
  notEvaluable,
  stepper,
} from './judge.ts'
import { BACK, BETWEEN, BEYOND, Latch, UNKNOWN, type Zone } from './latch.ts'
import { figureText, firstAt, measured, silenceText } from './series.ts'

interface Rate {
  series: Series
  windowS: number
  /** How many bins make the window, where the readings are dense enough. */
  bins: number
  /** Changes are seen in the logarithm, base 10. */
  logarithmic: boolean
  /** Slope per bin and mean of the newest bin (as binned). */
  zone: (perBin: number, newest: number, binMs: number, at: number) => Zone
  describe: (
    perBin: number,
    newest: number,
    binMs: number,
    at: number,
  ) => Pick<Change, 'value' | 'limit' | 'unit' | 'what' | 'text'>
}

function judgeRate(of: Case<SeriesFacts>, rate: Rate): Judge {
  const { content, facts, memory } = of
  const { series, windowS } = rate
  const binMs = Math.max((1000 * windowS) / rate.bins, 1000 * series.periodS)
  const count = Math.floor((1000 * windowS) / binMs)
  const bins = new Bins(binMs, count, series.periodS, kept(memory, 'bins'))
  const latch = new Latch(
    content.onDelayS * 1000,
    content.offDelayS * 1000,
    1000 * windowS,
    kept(memory, 'latch'),
  )
  const quietS = figure(of, 'quietAfterS')
  let ranFromMs = Number.NEGATIVE_INFINITY
  let forgotMs = (kept(memory, 'forgotMs') as number | null | undefined) ?? null

  function judgeBin(closedBy: number, changes: Change[]): void {
    const bin = bins.close() as Bin
    const window = bins.window(bin.index, count)
    if (bins.coverage(bin.index, count) < content.coverage) return
    const slope = medianSlope(window)
    const newest = bin.sum / bin.count
    const at = bin.index * binMs
    const zone = Number.isNaN(slope) ? UNKNOWN : rate.zone(slope, newest, binMs, bin.lastMs)
    const turned = latch.step(at, zone, slope, 1, bin.lastMs)
    if (turned === 0) return
    changes.push({
      part: 'rate',
      on: turned === 1,
      // Certain only now: the reading before might have had company.
      atMs: closedBy,
      sinceMs: latch.since(turned, bin.lastMs),
      priority: content.priority,
      ...rate.describe(slope, newest, binMs, bin.lastMs),
    })
  }

  return {
    run(fromMs, untilMs) {
      ranFromMs = fromMs
      const changes: Change[] = []
      const disturbedAt = lastDisturbance(quietS > 0 ? facts.disturbances : [])
      const end = firstAt(series.at, untilMs)
      for (let i = firstAt(series.at, fromMs); i < end; i += 1) {
        const at = series.at[i] as number
        if (bins.openEndMs <= at) judgeBin(at, changes)
        const disturbedMs = disturbedAt(at)
        if (disturbedMs !== null && (forgotMs === null || disturbedMs > forgotMs)) {
          bins.forget()
          latch.interrupt()
          forgotMs = disturbedMs
        }
        const isQuiet = disturbedMs !== null && at < disturbedMs + 1000 * quietS
        const value = isQuiet ? Number.NaN : measured(series, i)
        bins.add(at, rate.logarithmic ? (value > 0 ? Math.log10(value) : Number.NaN) : value)
      }
      return changes
    },
    verdict(untilMs) {
      if (count < 3) {
        return notEvaluable(
          `${series.tag}: a reading every ${series.periodS} s is too coarse for a window of ${windowS / 60} min.`,
        )
      }
      const known = latch.knownMs
      const covers = bins.coverageBefore(untilMs, count)
      if (known !== null && untilMs - known <= 1000 * windowS && covers >= content.coverage) return EVALUABLE
      const asked = Math.round(100 * content.coverage)
      return notEvaluable(
        `${silenceText(series, known, ranFromMs, untilMs)} Good readings cover ${Math.round(100 * covers)} % of the window, ${asked} % are asked for.`,
      )
    },
    memory: () => ({ bins: bins.memory(), latch: latch.memory(), forgotMs }),
  }
}

/** A3: so many times more within the window, and worth the name. */
export function judgeFastRise(of: Case<SeriesFacts>): Judge {
  const { series } = of.facts
  const windowS = figure(of, 'windowS')
  const ratio = figure(of, 'ratio')
  const clearRatio = figure(of, 'clearRatio')
  const floorPa = figure(of, 'floorPa')
  const over = (perBin: number, binMs: number) => 10 ** ((perBin * 1000 * windowS) / binMs)
  return judgeRate(of, {
    series,
    windowS,
    bins: 10,
    logarithmic: true,
    zone(perBin, newest, binMs) {
      const rise = over(perBin, binMs)
      if (rise >= ratio && 10 ** newest > floorPa) return BEYOND
      return rise < clearRatio ? BACK : BETWEEN
    },
    describe(perBin, newest, binMs) {
      const rise = over(perBin, binMs)
      const minutes = windowS / 60
      return {
        value: rise,
        limit: ratio,
        unit: '',
        what: `${series.tag} rises ${figureText(rise, '')} times in ${minutes} min, now ${figureText(10 ** newest, 'Pa')} (limit ${figureText(ratio, '')} times)`,
        text: `${series.tag} changes by a factor of ${figureText(rise, '')} in ${minutes} min and stands at ${figureText(10 ** newest, 'Pa')}; told from a factor of ${figureText(ratio, '')} above ${figureText(floorPa, 'Pa')}.`,
      }
    },
  })
}

const DAY_MS = 86_400_000

/** A4: hour by hour over days. */
export function judgeSlowRise(of: Case<SeriesFacts>): Judge {
  const { series } = of.facts
  const windowS = figure(of, 'windowS')
  const perDay = figure(of, 'perDay')
  const clear = figure(of, 'clearPerDay')
  const daily = (perBin: number, binMs: number) => 10 ** ((perBin * DAY_MS) / binMs) - 1
  return judgeRate(of, {
    series,
    windowS,
    bins: windowS / 3600,
    logarithmic: true,
    zone(perBin, _newest, binMs) {
      const rise = daily(perBin, binMs)
      return rise >= perDay ? BEYOND : rise < clear ? BACK : BETWEEN
    },
    describe(perBin, newest, binMs) {
      const rise = 100 * daily(perBin, binMs)
      return {
        value: rise,
        limit: 100 * perDay,
        unit: '%/d',
        what: `${series.tag} rises ${rise.toFixed(0)} % a day (limit ${(100 * perDay).toFixed(0)})`,
        text: `${series.tag} has changed by ${rise.toFixed(0)} % a day over ${(windowS / 86_400).toFixed(0)} days and stands at ${figureText(10 ** newest, 'Pa')}.`,
      }
    },
  })
}

/** A9: the slope of a temperature against the planned rate, and against one that holds in any case. */
export function judgeRamp(of: Case<RampFacts>): Judge {
  const { series, planned } = of.facts
  const windowS = figure(of, 'windowS')
  const above = figure(of, 'aboveCPerH')
  const hard = figure(of, 'hardCPerH')
  const perHour = (perBin: number, binMs: number) => (perBin * 3_600_000) / binMs
  const plannedAt = (ms: number) => stepper(planned, Number.NaN)(ms)
  const limits = (ms: number) => {
    const rate = plannedAt(ms)
    return Number.isNaN(rate)
      ? { limit: hard, back: hard - above, rate }
      : { limit: Math.min(hard, rate + above), back: Math.min(rate, hard - above), rate }
  }
  return judgeRate(of, {
    series,
    windowS,
    bins: 10,
    logarithmic: false,
    zone(perBin, _newest, binMs, at) {
      const rate = perHour(perBin, binMs)
      const { limit, back } = limits(at)
      return rate > limit ? BEYOND : rate < back ? BACK : BETWEEN
    },
    describe(perBin, newest, binMs, at) {
      const rate = perHour(perBin, binMs)
      const { limit, rate: plan } = limits(at)
      return {
        value: rate,
        limit,
        unit: '°C/h',
        what: `${series.tag} ramp ${rate.toFixed(1)} °C/h (limit ${limit.toFixed(1)})`,
        text: `${series.tag} goes up by ${rate.toFixed(1)} °C/h over ${windowS / 60} min and stands at ${figureText(newest, '°C')}; ${Number.isNaN(plan) ? 'no rate is planned' : `${plan.toFixed(1)} °C/h are planned`}.`,
      }
    },
  })
}
