/**
 * What a running bake looks like at one instant, from the thermocouples along the tube. Pure. Temperatures in °C,
 * chainage in metres, times in milliseconds UTC. A thermocouple that cannot be believed is named and left out of every
 * figure; it is never averaged in.
 */
import { median } from '../physics/statistics.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 3_600_000
const DAY_MS = 86_400_000

/** A thermocouple and the newest that is known of it. */
export interface ThermocoupleNow {
  tag: string
  chainageM: number
  /** Newest usable value; null when there is none at all. */
  celsius: number | null
  at: number | null
  /** What the logger said instead of a value later than `at`, in words; empty when nothing. */
  since: string
}

/** `fresh` is believed; `stale` has a value too old for it; `silent` never had one, or its last word was no value. */
export type ThermocoupleState = 'fresh' | 'stale' | 'silent'

export interface SkylinePoint extends ThermocoupleNow {
  state: ThermocoupleState
  ageMinutes: number | null
}

/**
 * The temperatures along the tube, west to east, each with its age.
 *
 * @param staleAfterMinutes a value older than this no longer says what the tube is like
 */
export function skylineOf(
  thermocouples: readonly ThermocoupleNow[],
  now: number,
  staleAfterMinutes: number,
): SkylinePoint[] {
  return thermocouples
    .map((one): SkylinePoint => {
      const ageMinutes = one.at === null ? null : (now - one.at) / MINUTE_MS
      const silent = one.celsius === null || ageMinutes === null || one.since !== ''
      return {
        ...one,
        ageMinutes,
        state: silent ? 'silent' : ageMinutes > staleAfterMinutes ? 'stale' : 'fresh',
      }
    })
    .sort((a, b) => a.chainageM - b.chainageM)
}

interface Spread {
  hottest: { tag: string; celsius: number; chainageM: number }
  coolest: { tag: string; celsius: number; chainageM: number }
  celsius: number
  /** The two neighbours that differ most, with how much; null with fewer than two in a row. */
  neighbours: { first: string; second: string; celsius: number } | null
  medianC: number
  /** How many thermocouples the figures rest on, of how many. */
  counted: number
  of: number
}

/** Spread along the tube from what is fresh; null when fewer than two thermocouples are. */
export function spreadOf(points: readonly SkylinePoint[]): Spread | null {
  const fresh = points.flatMap(({ state, tag, celsius, chainageM }) =>
    state === 'fresh' && celsius !== null ? [{ tag, celsius, chainageM }] : [],
  )
  const [first] = fresh
  if (first === undefined || fresh.length < 2) return null
  let hottest = first
  let coolest = first
  let neighbours: Spread['neighbours'] = null
  for (const [index, one] of fresh.entries()) {
    if (one.celsius > hottest.celsius) hottest = one
    if (one.celsius < coolest.celsius) coolest = one
    const next = fresh[index + 1]
    if (next === undefined) continue
    const apart = Math.abs(next.celsius - one.celsius)
    if (neighbours === null || apart > neighbours.celsius) {
      neighbours = { first: one.tag, second: next.tag, celsius: apart }
    }
  }
  return {
    hottest,
    coolest,
    celsius: hottest.celsius - coolest.celsius,
    neighbours,
    medianC: median(fresh.map(({ celsius }) => celsius)),
    counted: fresh.length,
    of: points.length,
  }
}

/** The fresh thermocouples that lie farthest from the setpoint, the worst first; at most two. */
export function worstTwo(
  points: readonly SkylinePoint[],
  setpointC: number,
): { tag: string; celsius: number; offC: number; chainageM: number }[] {
  return points
    .flatMap(({ state, tag, celsius, chainageM }) =>
      state === 'fresh' && celsius !== null ? [{ tag, celsius, chainageM, offC: celsius - setpointC }] : [],
    )
    .sort((a, b) => Math.abs(b.offC) - Math.abs(a.offC))
    .slice(0, 2)
}

const LEAST_VALUES_OF_A_RATE = 4

/**
 * Rate over a window that ends now, K/h: the median of the slopes between all pairs of values (Theil 1950, Sen 1968), so
 * that one wild value does not make it. Null with fewer than four values or when they cover less than 60 % of the window.
 *
 * @param values instants (ms) and temperatures, oldest first; a missing value is null and left out
 */
export function rampRate(
  values: readonly { at: number; celsius: number | null }[],
  now: number,
  windowMinutes = 30,
): number | null {
  const inside = values.flatMap(({ at, celsius }) =>
    celsius !== null && at > now - windowMinutes * MINUTE_MS && at <= now ? [{ at, celsius }] : [],
  )
  const first = inside[0]
  const last = inside.at(-1)
  if (first === undefined || last === undefined || inside.length < LEAST_VALUES_OF_A_RATE) return null
  if (last.at - first.at < 0.6 * windowMinutes * MINUTE_MS) return null
  const slopes: number[] = []
  for (const [index, one] of inside.entries()) {
    for (const later of inside.slice(index + 1)) {
      if (later.at > one.at) slopes.push(((later.celsius - one.celsius) / (later.at - one.at)) * HOUR_MS)
    }
  }
  return slopes.length === 0 ? null : median(slopes)
}

/** Which day of a stretch it is, counted from 1, of how many; a planned length in hours is rounded up to whole days. */
export function dayOf(since: number, now: number, plannedHours: number): { day: number; of: number } {
  return {
    day: Math.max(1, Math.floor((now - since) / DAY_MS) + 1),
    of: Math.max(1, Math.ceil((plannedHours * HOUR_MS) / DAY_MS - 1e-9)),
  }
}

/** What can be said of the end of the present phase. */
export type ProjectedEnd = { kind: 'at'; at: number; because: string } | { kind: 'unknown'; because: string }

/**
 * When the ramp will arrive: remaining kelvins at the present rate.
 *
 * @param rateKH measured rate; null when it cannot be told
 */
export function rampEnd(
  now: number,
  medianC: number | null,
  setpointC: number,
  rateKH: number | null,
): ProjectedEnd {
  if (medianC === null) return { kind: 'unknown', because: 'no fresh thermocouple says how warm the tube is' }
  if (medianC >= setpointC) return { kind: 'at', at: now, because: 'the tube is at its setpoint' }
  if (rateKH === null) {
    return { kind: 'unknown', because: 'the last half hour has too few values to tell the rate' }
  }
  const left = setpointC - medianC
  if (rateKH < 0.5) {
    return {
      kind: 'unknown',
      because: `${left.toFixed(0)} K are left and the tube gains only ${rateKH.toFixed(1)} K/h`,
    }
  }
  return {
    kind: 'at',
    at: now + (left / rateKH) * HOUR_MS,
    because: `${left.toFixed(0)} K left at ${rateKH.toFixed(1)} K/h`,
  }
}

/**
 * When the soak will have been held long enough: hours during which the tube was below its band do not count, so the end
 * moves by them.
 *
 * @param lostHours hours since the start of the soak during which the median lay below the band
 */
export function soakEnd(since: number, soakHours: number, lostHours: number): ProjectedEnd {
  const at = since + (soakHours + lostHours) * HOUR_MS
  return {
    kind: 'at',
    at,
    because:
      lostHours < 0.05
        ? `${soakHours.toFixed(0)} h from its start, none of them lost so far`
        : `${soakHours.toFixed(0)} h from its start and ${lostHours.toFixed(1)} h below the band made up`,
  }
}

/** Limits that a bake is held against; null where the site has set none. */
export interface BakeLimits {
  toleranceC: number | null
  spreadC: number | null
  rateKH: number | null
  holdPa: number | null
  abortPa: number | null
}

export interface Advice {
  kind: 'pressure' | 'spread' | 'rate' | 'temperature' | 'blind'
  /** `abort` outranks `hold`; `look` asks for eyes, not for a change of the setpoint. */
  level: 'abort' | 'hold' | 'look'
  /** A sentence with the figure and the limit. */
  text: string
}

/**
 * What the person at the controls is advised to do, the gravest first. Advice only: the product switches nothing, and the
 * hardware cut-outs don't know of it.
 */
export function adviceFor(input: {
  phase: 'heating' | 'soak'
  points: readonly SkylinePoint[]
  setpointC: number
  rateKH: number | null
  pressurePa: number | null
  limits: BakeLimits
  pressureText: (pa: number) => string
}): Advice[] {
  const { phase, points, setpointC, rateKH, pressurePa, limits, pressureText } = input
  const advice: Advice[] = []
  if (pressurePa !== null && limits.abortPa !== null && pressurePa > limits.abortPa) {
    advice.push({
      kind: 'pressure',
      level: 'abort',
      text: `Pressure ${pressureText(pressurePa)}, above ${pressureText(limits.abortPa)}: break off the bake.`,
    })
  } else if (pressurePa !== null && limits.holdPa !== null && pressurePa > limits.holdPa) {
    advice.push({
      kind: 'pressure',
      level: 'hold',
      text: `Pressure ${pressureText(pressurePa)}, above ${pressureText(limits.holdPa)}: hold the setpoint until it has fallen.`,
    })
  }
  const spread = spreadOf(points)
  if (spread === null) {
    advice.push({
      kind: 'blind',
      level: 'hold',
      text: 'Fewer than two thermocouples are fresh: nobody can see how warm the tube is.',
    })
  } else {
    if (limits.spreadC !== null && spread.celsius > limits.spreadC) {
      advice.push({
        kind: 'spread',
        level: 'hold',
        text: `Spread ${spread.celsius.toFixed(0)} °C between ${spread.hottest.tag} (${spread.hottest.celsius.toFixed(0)} °C) and ${spread.coolest.tag} (${spread.coolest.celsius.toFixed(0)} °C), more than ${limits.spreadC} °C: do not raise the setpoint; look at the insulation near ${spread.coolest.chainageM.toFixed(0)} m.`,
      })
    }
    if (limits.toleranceC !== null && spread.hottest.celsius > setpointC + limits.toleranceC) {
      advice.push({
        kind: 'temperature',
        level: 'hold',
        text: `${spread.hottest.tag} at ${spread.hottest.celsius.toFixed(0)} °C, more than ${limits.toleranceC} °C above the setpoint of ${setpointC.toFixed(0)} °C: lower the power.`,
      })
    }
    if (phase === 'soak' && limits.toleranceC !== null && spread.medianC < setpointC - limits.toleranceC) {
      advice.push({
        kind: 'temperature',
        level: 'look',
        text: `The tube's median is ${spread.medianC.toFixed(0)} °C, below the band: these hours do not count as soak.`,
      })
    }
  }
  if (
    phase === 'heating' &&
    rateKH !== null &&
    limits.rateKH !== null &&
    rateKH > limits.rateKH + RATE_MARGIN_KH
  ) {
    advice.push({
      kind: 'rate',
      level: 'hold',
      text: `The tube climbs ${rateKH.toFixed(1)} °C/h, more than ${limits.rateKH} °C/h: hold until it has evened out.`,
    })
  }
  const missing = points.filter(({ state }) => state !== 'fresh')
  if (missing.length > 0 && spread !== null) {
    advice.push({
      kind: 'blind',
      level: 'look',
      text: `${missing.map(({ tag }) => tag).join(', ')} ${missing.length === 1 ? 'says' : 'say'} nothing at present: the tube is not watched there.`,
    })
  }
  const rank = { abort: 0, hold: 1, look: 2 }
  return advice.sort((a, b) => rank[a.level] - rank[b.level])
}

/** A controller breathes a little about its rate; a ramp is called too fast beyond this (common practice, no source). */
const RATE_MARGIN_KH = 2

/** Where a cooling tube stands on the way to being touched. */
export interface Cooling {
  hottest: { tag: string; celsius: number; chainageM: number; ageMinutes: number } | null
  /** Forecast of the instant at which the hottest point reaches the touch limit; null when it can't be told. */
  touchSafeAt: number | null
  /** True when the newest measured hottest point is at or below the limit. Still to be confirmed by contact probe. */
  below: boolean
}

/**
 * How a cooling tube stands: the hottest measured point, and when it will be at the touch limit if it goes on cooling as
 * an insulated tube does, T = Ta + (T0 - Ta) exp(-t / tau). A forecast, not a permission.
 *
 * @param tauHours time constant of free cooling
 */
export function coolingOf(
  points: readonly SkylinePoint[],
  now: number,
  facts: { ambientC: number; touchC: number; tauHours: number },
): Cooling {
  const seen = points.filter(
    ({ celsius, at, state }) => celsius !== null && at !== null && state !== 'silent',
  )
  let hottest: Cooling['hottest'] = null
  let when = now
  for (const { tag, celsius, chainageM, ageMinutes, at } of seen) {
    if (celsius === null || ageMinutes === null || at === null) continue
    if (hottest !== null && celsius <= hottest.celsius) continue
    hottest = { tag, celsius, chainageM, ageMinutes }
    when = at
  }
  if (hottest === null) return { hottest, touchSafeAt: null, below: false }
  const { ambientC, touchC, tauHours } = facts
  if (hottest.celsius <= touchC) return { hottest, touchSafeAt: when, below: true }
  if (touchC <= ambientC) return { hottest, touchSafeAt: null, below: false }
  const hours = tauHours * Math.log((hottest.celsius - ambientC) / (touchC - ambientC))
  return { hottest, touchSafeAt: when + hours * HOUR_MS, below: false }
}

/** A counter this near to its end has wrapped when it reads less; anything else is another meter, or was set back. */
const NEAR_ITS_END = 0.9

/**
 * Energy between the first and last value of a meter that counts up and begins again after its last digit, kWh. Null with
 * fewer than two values, and where it falls from the middle of its range: then nobody knows what it counted.
 */
export function meterEnergy(values: readonly (number | null)[]): number | null {
  const told = values.flatMap((value) => (value === null ? [] : [value]))
  if (told.length < 2) return null
  let total = 0
  for (const [index, value] of told.entries()) {
    const before = told[index - 1]
    if (before === undefined) continue
    const end = 10 ** Math.ceil(Math.log10(before + 1))
    if (value < before && before < NEAR_ITS_END * end) return null
    total += value >= before ? value - before : value + end - before
  }
  return total
}

/**
 * Energy a supply gave, kWh: volts × amps over time by the trapezoid. A gap longer than `gapMinutes` is not bridged; the
 * hours left out are returned beside the figure.
 */
export function supplyEnergy(
  values: readonly { at: number; volts: number | null; amps: number | null }[],
  gapMinutes: number,
): { kWh: number; missingHours: number } {
  let joules = 0
  let missing = 0
  const told = values.flatMap(({ at, volts, amps }) =>
    volts === null || amps === null ? [] : [{ at, watts: volts * amps }],
  )
  for (const [index, one] of told.entries()) {
    const before = told[index - 1]
    if (before === undefined) continue
    const seconds = (one.at - before.at) / 1000
    if (seconds > gapMinutes * 60) missing += seconds
    else joules += ((one.watts + before.watts) / 2) * seconds
  }
  return { kWh: joules / 3.6e6, missingHours: missing / 3600 }
}
