/** Forecast of a running pump-down: what the log says when carried on, beside what the model says. */
import { forecastTimeToTarget } from '../physics/forecast.ts'
import { hoursToReach, predictPumpDown } from '../physics/predict.ts'
import type { Curves } from './segment-curves.server.ts'
import { coldModel } from './segment-model.server.ts'
import type { StandingSegment } from './standing.server.ts'

const HOUR_MS = 3_600_000
/** The curve is drawn on to this many times the hours gone by, so that its course can be seen. */
const LOOK_AHEAD = 4
const CURVE_POINTS = 120
const FIRST_HOUR = 0.5

export interface PumpDownForecast {
  /** Gauge the forecast is made from. */
  gauge: string
  startedAt: Date
  askedPa: number
  /** Whether the reader chose the pressure; otherwise it is the next power of ten below the reading. */
  chosen: boolean
  result: ReturnType<typeof forecastTimeToTarget>
  /** The same for the target in service, to say whether waiting can do it. */
  target: { pa: number; result: ReturnType<typeof forecastTimeToTarget>; fastestHours: number | null } | null
  /** Model's own answer for the asked pressure, hours after the start; null when it never gets there. */
  modelHours: number | null
  model: { hours: number[]; pa: number[] } | null
}

/** Forecast from the cross gauge, or the first hot-cathode gauge with data; null when there is no gauge to go by. */
export function forecastPumpDown(
  standing: StandingSegment,
  curves: Curves,
  now: Date,
  ask: number | null,
): PumpDownForecast | null {
  const hot = curves.gauges.filter(({ kind }) => kind === 'hot-cathode')
  const gauge = hot.find(({ tag }) => tag.endsWith('B')) ?? hot[0]
  if (gauge === undefined || standing.segment.since === null) return null
  const hours: number[] = []
  const pa: number[] = []
  for (const [step, value] of gauge.mean.entries()) {
    if (value === null) continue
    hours.push(((step + 0.5) * curves.stepSeconds) / 3600)
    pa.push(value)
  }
  const last = pa.at(-1)
  if (last === undefined) return null
  const askedPa = ask ?? Number(`1e${Math.ceil(Math.log10(last)) - 1}`)
  const targetPa = standing.target?.value ?? null
  const model = coldModel(standing.segment, standing.pumps)
  const position = standing.gauges.find(({ position: { tag } }) => tag === gauge.tag)?.position
  const atM = (position?.chainageM ?? standing.segment.startM) - standing.segment.startM
  const gone = (now.getTime() - standing.segment.since.getTime()) / HOUR_MS
  const result = forecastTimeToTarget({ hours, pa }, { targetPa: askedPa })
  return {
    gauge: gauge.tag,
    startedAt: standing.segment.since,
    askedPa,
    chosen: ask !== null,
    result,
    target:
      targetPa === null
        ? null
        : {
            pa: targetPa,
            result: forecastTimeToTarget({ hours, pa }, { targetPa }),
            fastestHours: result.kind === 'forecast' ? fastest(result, gone, last / targetPa) : null,
          },
    modelHours: model === null ? null : hoursToReach(model, askedPa, atM),
    model: model === null ? null : modelCurve(model, gone * LOOK_AHEAD, atM),
  }
}

/** Hours to a far target if the fall went on as steeply as the fit allows and no floor came: the best that waiting can do. */
function fastest(fit: { alpha: number; alphaSe: number }, goneHours: number, factor: number): number {
  return factor <= 1 ? goneHours : goneHours * factor ** (1 / (fit.alpha + 2 * fit.alphaSe))
}

function modelCurve(model: NonNullable<ReturnType<typeof coldModel>>, untilHours: number, atM: number) {
  const ratio = Math.max(untilHours, 2 * FIRST_HOUR) / FIRST_HOUR
  const hours = Array.from(
    { length: CURVE_POINTS },
    (_, index) => FIRST_HOUR * ratio ** (index / (CURVE_POINTS - 1)),
  )
  return { hours, pa: [...predictPumpDown(model, { hours, atM }).n2EquivalentPa] }
}
