/**
 * Pressures of the demo, in Pa nitrogen-equivalent, as each gauge would say them without noise. The last values are the
 * state in which the demo is found; what comes before leads there by simple laws, named beside each segment.
 */
import { at } from '../demo-time.ts'
import { dailySwing } from './noise.ts'

const HOUR_MS = 3_600_000
const WEEK_MS = 7 * 24 * HOUR_MS

/** West end, cross, east end. */
export type Gauge = 'A' | 'B' | 'C'
type Values = Record<Gauge, number>

/** A pressure in Pa, or why there is none; `gone` means that the logger writes no row. */
export type Said = number | 'off' | 'over' | 'gone'

/** End of the last night. */
export const NIGHT_END = at('2026-11-09 06:00')
const END_MS = NIGHT_END.getTime()

/** Upper end of what the ionisation gauges measure. */
const GAUGE_TOP_PA = 1e-2

const three = (A: number, B: number, C: number): Values => ({ A, B, C })
const ms = (text: string) => at(text).getTime()
const hoursBetween = (fromMs: number, toMs: number) => (toMs - fromMs) / HOUR_MS

type Curve = (gauge: Gauge, atMs: number) => Said

/** Nothing happens but the daily swing. */
function quiet(values: Values, referenceMs = END_MS): Curve {
  return (gauge, atMs) => values[gauge] * dailySwing(atMs, referenceMs)
}

/** One law before an instant and another from then on. */
function then(first: Curve, changeMs: number, second: Curve): Curve {
  return (gauge, atMs) => (atMs < changeMs ? first : second)(gauge, atMs)
}

const off: Curve = () => 'off'
const gone: Curve = () => 'gone'

/** HC-07A loses sensitivity from mid-October and has all but settled by November. */
function sg07(): Curve {
  const steady = quiet(three(1.8e-8, 4.7e-8, 5.5e-8))
  const began = ms('2026-10-14 00:00')
  const endLoss = Math.exp(-hoursBetween(began, END_MS) / 90)
  return (gauge, atMs) => {
    const value = steady(gauge, atMs)
    if (gauge !== 'A' || typeof value !== 'number') return value
    const left = atMs < began ? 1 : Math.exp(-hoursBetween(began, atMs) / 90)
    return value * (1 + 2.1 * (left - endLoss))
  }
}

/** A joint at the east end opens within forty minutes; air adds the same at the cross and beyond, more at the leak. */
function sg06(): Curve {
  const clean = quiet(three(6.5e-8, 4.5e-8, 4.5e-8))
  const leak = three(1.25e-7, 1.25e-7, 2.65e-7)
  const opens = ms('2026-10-31 03:00')
  return (gauge, atMs) => {
    const share = Math.min(1, Math.max(0, (atMs - opens) / (40 * 60_000)))
    return (clean(gauge, atMs) as number) + leak[gauge] * share
  }
}

/**
 * A bake: log p climbs with the ramp, then p falls as 1/(1 + t/t0), with t0 such that the value at `checkMs` holds.
 * The cold cathode is switched off for it.
 */
function bake(input: {
  rampMs: number
  soakMs: number
  from: Values
  peakPa: number
  check: Values
  checkMs: number
}): Curve {
  const t0 = hoursBetween(input.soakMs, input.checkMs) / (input.peakPa / input.check.B - 1)
  return (gauge, atMs) => {
    if (gauge === 'C') return 'off'
    const shape = input.check[gauge] / input.check.B
    if (atMs < input.soakMs) {
      const share = (atMs - input.rampMs) / (input.soakMs - input.rampMs)
      return input.from[gauge] * ((input.peakPa * shape) / input.from[gauge]) ** share
    }
    return (input.peakPa * shape) / (1 + hoursBetween(input.soakMs, atMs) / t0)
  }
}

/** Cooling: log p follows 1/T, T falling exponentially toward the tunnel's 18 °C; both ends are given. */
function cooling(input: { fromMs: number; from: Values; to: Values; tauH: number }): Curve {
  const inverse = (atMs: number) =>
    1 / (291.15 + 132 * Math.exp(-Math.max(0, hoursBetween(input.fromMs, atMs)) / input.tauH))
  const start = inverse(input.fromMs)
  const span = inverse(END_MS) - start
  return (gauge, atMs) => {
    if (gauge === 'C') return 'off'
    return input.from[gauge] * (input.to[gauge] / input.from[gauge]) ** ((inverse(atMs) - start) / span)
  }
}

function sg05(): Curve {
  const before = three(1.3e-7, 1.0e-7, 1.25e-7)
  const rampMs = ms('2026-11-04 20:00')
  const hot = bake({
    rampMs,
    soakMs: ms('2026-11-05 09:12'),
    from: before,
    peakPa: 4e-3,
    check: three(2.4e-4, 2.1e-4, 0),
    checkMs: END_MS,
  })
  return then(quiet(before), rampMs, hot)
}

function sg08(): Curve {
  const before = three(1.5e-7, 1.2e-7, 1.5e-7)
  const rampMs = ms('2026-11-01 10:20')
  const heatOff = ms('2026-11-08 23:30')
  const last = three(1.08e-4, 9.5e-5, 0)
  const hot = bake({
    rampMs,
    soakMs: ms('2026-11-01 23:30'),
    from: before,
    peakPa: 3e-3,
    check: last,
    checkMs: heatOff,
  })
  const cold = cooling({ fromMs: heatOff, from: last, to: three(3.9e-7, 3.3e-7, 0), tauH: 7.7 })
  return then(quiet(before), rampMs, then(hot, heatOff, cold))
}

/** Start of high vacuum on SG-11. */
export const SG11_PUMPING = at('2026-11-06 14:00')

/** Unbaked steel: the water leaves as 1/t. At 66 h the gauges stand at the values given. */
function sg11(): Curve {
  const at66 = three(3.4e-5, 2.4e-5, 3.5e-5)
  const vented = ms('2026-10-26 08:10')
  const gaugesOn = SG11_PUMPING.getTime() + 5 * 60_000
  const falling: Curve = (gauge, atMs) => {
    const value = (at66[gauge] * 66) / hoursBetween(SG11_PUMPING.getTime(), atMs)
    return value > GAUGE_TOP_PA ? 'over' : value
  }
  return then(quiet(three(4.1e-7, 3.0e-7, 4.2e-7)), vented, then(off, gaugesOn, falling))
}

/** Pump port shut: hydrogen, and next to nothing else, rises in proportion to time. */
function sg13(): Curve {
  const shut = ms('2026-11-08 20:00')
  const at12 = three(7.1e-5, 7.2e-5, 7.0e-5)
  const before = three(7.0e-8, 5.0e-8, 6.8e-8)
  const rising: Curve = (gauge, atMs) => {
    const share = hoursBetween(shut, atMs) / 12
    return before[gauge] + (at12[gauge] - before[gauge]) * share
  }
  return then(quiet(before), shut, rising)
}

/** Grows by six per cent a week. */
function sg16(): Curve {
  const steady = quiet(three(4.1e-7, 3.4e-7, 4.3e-7))
  return (gauge, atMs) => (steady(gauge, atMs) as number) * 1.06 ** ((atMs - END_MS) / WEEK_MS)
}

/** Last row of the logger card that SG-15 hangs on. */
export const SG15_LAST = at('2026-11-08 22:10')

const CURVES: Record<string, Curve> = {
  'SG-01': quiet(three(6.3e-8, 5.1e-8, 6.0e-8)),
  'SG-02': quiet(three(6.1e-8, 4.9e-8, 6.2e-8)),
  'SG-03': quiet(three(6.0e-8, 4.9e-8, 6.0e-8)),
  'SG-04': quiet(three(6.1e-8, 5.2e-8, 6.4e-8)),
  'SG-05': sg05(),
  'SG-06': sg06(),
  'SG-07': sg07(),
  'SG-08': sg08(),
  'SG-09': quiet(three(5.6e-8, 4.2e-8, 5.9e-8)),
  'SG-10': quiet(three(5.9e-8, 4.0e-8, 5.6e-8)),
  'SG-11': sg11(),
  'SG-12': quiet(three(2.6e-7, 2.0e-7, 2.7e-7)),
  'SG-13': sg13(),
  'SG-14': then(quiet(three(8.2e-8, 6.6e-8, 8.4e-8)), ms('2026-11-05 07:15'), off),
  'SG-15': then(quiet(three(5.7e-8, 4.2e-8, 5.8e-8), SG15_LAST.getTime()), SG15_LAST.getTime() + 1, gone),
  'SG-16': sg16(),
  'SP-1': then(quiet(three(3.1e-8, 2.1e-8, 3.0e-8)), ms('2026-10-28 08:30'), off),
}

/** What a gauge of a segment would say at an instant, without noise. */
export function pressureAt(segment: string, gauge: Gauge, instant: Date): Said {
  const curve = CURVES[segment]
  if (curve === undefined) throw new Error(`The demo has no pressures for ${segment}`)
  return curve(gauge, instant.getTime())
}
