/** A1, A2, A5 and A8: one reading after another against a limit. */
import type { AlertPriority } from '../alert-words.ts'
import type { HeatLimitedPart, OverTemperatureFacts, PressureFacts, Series } from './facts.ts'
import { type Case, figure, follow, type Judge, stepper } from './judge.ts'
import { judgeParts } from './parts.ts'
import { figureText, zoneAbove } from './series.ts'

interface Level {
  part: string
  priority: AlertPriority
  /** Limit and where it clears, for ascending instants; NaN where there is no limit. */
  limitAt: () => (ms: number) => number
  backOf: (limit: number) => number
  /** For the title and the sentence. */
  describe: (value: number, limit: number) => { what: string; text: string }
}

/** Judges a series against one or several limits from above. */
function judgeLevels(of: Case<unknown>, series: Series, unit: string, levels: readonly Level[]): Judge {
  return judgeParts(
    of,
    levels.map(({ part, priority, limitAt, backOf, describe }) => ({
      part,
      priority,
      series,
      unit,
      start() {
        const limitOf = limitAt()
        return (i, at) => {
          const limit = limitOf(at)
          return zoneAbove(series, i, limit, backOf(limit))
        }
      },
      describe(value, at, on) {
        const limit = limitAt()(at)
        const { what, text } = describe(value, limit)
        if (on) return { limit, what, text }
        const back = `${series.tag} back at ${figureText(value, unit)}`
        return {
          limit,
          what: back,
          text: `${back}, below the ${figureText(backOf(limit), unit)} at which it clears.`,
        }
      },
      unlimited: (at) => Number.isNaN(limitAt()(at)),
    })),
  )
}

/** A1 and A2. */
export function judgePressure(of: Case<PressureFacts>, name: 'limit' | 'target'): Judge {
  const { series, limits } = of.facts
  const divisor = figure(of, 'clearRatio')
  return judgeLevels(of, series, 'Pa', [
    {
      part: 'pressure',
      priority: of.content.priority,
      limitAt: () => stepper(limits, figure(of, 'limitPa')),
      backOf: (limit) => limit / divisor,
      describe: (value, limit) => ({
        what: `${series.tag} pressure ${figureText(value, 'Pa')} (${name} ${figureText(limit, '')})`,
        text: `${series.tag} reads ${figureText(value, 'Pa')}; the ${name} is ${figureText(limit, 'Pa')}, and it clears below ${figureText(limit / divisor, 'Pa')}.`,
      }),
    },
  ])
}

/** A5: two steps, to hold the ramp and to think of breaking off. */
export function judgePressureHot(of: Case<PressureFacts>): Judge {
  const { series, limits } = of.facts
  const divisor = figure(of, 'clearRatio')
  const step = (part: 'hold' | 'abort', does: string) => ({
    part,
    priority: of.content.priority,
    // The register's dated limit is that of the hold.
    limitAt: () => stepper(part === 'hold' ? limits : [], figure(of, part === 'hold' ? 'holdPa' : 'abortPa')),
    backOf: (limit: number) => limit / divisor,
    describe: (value: number, limit: number) => ({
      what: `${series.tag} ${figureText(value, 'Pa')} while hot, ${does} (limit ${figureText(limit, '')})`,
      text: `${series.tag} reads ${figureText(value, 'Pa')} with the tube hot; above ${figureText(limit, 'Pa')}: ${does}.`,
    }),
  })
  return judgeLevels(of, series, 'Pa', [
    step('hold', 'hold the ramp'),
    step('abort', 'think of breaking off'),
  ])
}

/** Tube temperature at which a part reaches its limit, °C. */
function tubeLimit({ limitC, riseShare }: HeatLimitedPart, ambientC: number): number {
  return riseShare > 0 ? ambientC + (limitC - ambientC) / riseShare : Number.POSITIVE_INFINITY
}

/** A8: the planned temperature and what the parts bear, whichever comes first. */
export function judgeOverTemperature(of: Case<OverTemperatureFacts>): Judge {
  const { series, setpoint, parts, ambientC } = of.facts
  const above = figure(of, 'aboveSetpointC')
  const deadband = figure(of, 'deadbandC')
  const weakest = [...parts].sort((a, b) => tubeLimit(a, ambientC) - tubeLimit(b, ambientC))[0]
  const bears = weakest === undefined ? Number.NaN : tubeLimit(weakest, ambientC)
  return judgeLevels(of, series, '°C', [
    {
      part: 'temperature',
      priority: of.content.priority,
      limitAt() {
        const plannedAt = follow(setpoint)
        return (ms) => {
          const planned = plannedAt(ms) + above
          return Number.isNaN(planned) ? bears : Number.isNaN(bears) ? planned : Math.min(planned, bears)
        }
      },
      backOf: (limit) => limit - deadband,
      describe(value, limit) {
        const byPart = weakest !== undefined && limit === bears
        const because = byPart
          ? weakest.riseShare === 1
            ? `${weakest.tag} bears ${figureText(weakest.limitC, '°C')}`
            : `${weakest.tag} bears ${figureText(weakest.limitC, '°C')} and then reaches it, at ${weakest.riseShare} of the tube’s rise`
          : `that is ${figureText(above, '°C')} above the planned temperature`
        return {
          what: `${series.tag} temperature ${figureText(value, '°C')} (limit ${figureText(limit, '')}${byPart ? `, ${weakest.tag}` : ''})`,
          text: `${series.tag} reads ${figureText(value, '°C')}; the limit is ${figureText(limit, '°C')}: ${because}. It clears below ${figureText(limit - deadband, '°C')}.`,
        }
      },
    },
  ])
}
