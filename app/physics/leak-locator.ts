/**
 * Where along a segment did air begin to come in? A leak far from the pump lifts the gauges beyond it more than those
 * near the pump; the rises of the gauges between two calm times therefore point to a stretch of tube.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { molecularSpecific } from './conductance.ts'
import { PhysicsError } from './errors.ts'
import type { Gas } from './gases.ts'
import { chiSquareQuantile } from './statistics.ts'
import { linePositions, type SteadyLine, steadyPressures } from './steady.ts'

export interface LeakedSegment {
  lengthM: number
  diameterM: number
  temperatureK: number
  /** Speeds for the gas that leaks in, at the tube. */
  pumps: readonly { atM: number; speedM3S: number }[]
  /**
   * Segments open to each other, one behind the other, where their diameters differ; they make up `lengthM`. Open gate
   * valves between them count as tube.
   */
  sections?: readonly { lengthM: number; diameterM: number }[]
  /** Nitrogen stands for air; helium when the rises are those of a helium trial. */
  gas?: Gas
}

/** Readings of one gauge in two calm times, in Pa of the leaking gas. */
export interface GaugeRise {
  atM: number
  beforePa: number
  afterPa: number
}

export interface LocatorErrors {
  /** Relative scatter of a reading against itself between the two times (daily swing, drift). */
  repeat: number
  /** Relative error of a gauge against its neighbours; 10 to 30 % is usual for ion gauges (common practice, no source). */
  scale: number
}

export type LeakLocation =
  | {
      kind: 'located'
      atM: number
      /** Stretches that hold the leak with 90 %, m; more than one where two places look alike. */
      stretches: [number, number][]
      throughputPaM3S: number
      /** Misfit of the best place, and how many of 100 true leaks would show a larger one. */
      chiSquare: number
    }
  | { kind: 'refused'; reason: 'too-few-gauges' | 'no-rise' | 'anywhere' | 'does-not-fit'; message: string }

const PLACES = 600
/** Share of the segment beyond which a stretch says nothing. */
const WHOLE = 0.8

/**
 * Locate one leak from the rises of at least two gauges. Molecular flow, steady on both sides. Refuses where the rises
 * drown in the errors, fit no single leak, or fit one anywhere. Throws PhysicsError on impossible numbers.
 */
export function locateLeak(
  segment: LeakedSegment,
  gauges: readonly GaugeRise[],
  errors: LocatorErrors = { repeat: 0.03, scale: 0.15 },
): LeakLocation {
  requireSegment(segment, gauges, errors)
  if (gauges.length < 2) {
    return {
      kind: 'refused',
      reason: 'too-few-gauges',
      message: `${gauges.length} gauge; at least 2 at different places are needed.`,
    }
  }
  const rises = gauges.map((g) => g.afterPa - g.beforePa)
  const quiet = gauges.map((g) => errors.repeat * Math.hypot(g.beforePa, g.afterPa))
  if (!rises.some((rise, i) => rise > 3 * quiet[i]!)) {
    return {
      kind: 'refused',
      reason: 'no-rise',
      message: 'No gauge rose by more than three times its own scatter between the two times.',
    }
  }
  const places = Array.from({ length: PLACES + 1 }, (_, i) => (i * segment.lengthM) / PLACES)
  const fits = places.map((atM) => fitAt(responses(segment, gauges, atM), rises, quiet, errors.scale))
  let best = 0
  for (let i = 1; i < fits.length; i++) if (fits[i]!.chiSquare < fits[best]!.chiSquare) best = i
  const { chiSquare, throughput } = fits[best]!
  const freedom = Math.max(1, gauges.length - 2)
  if (chiSquare > chiSquareQuantile(0.01, freedom)) {
    return {
      kind: 'refused',
      reason: 'does-not-fit',
      message: `The rises fit no single leak (misfit ${chiSquare.toFixed(1)}): perhaps two leaks, a warming wall, or a pump that changed.`,
    }
  }
  const allowed = chiSquare + chiSquareQuantile(0.1, 1)
  const stretches = stretchesOf(places, (i) => fits[i]!.chiSquare <= allowed)
  const held = stretches.reduce((sum, [from, to]) => sum + to - from, 0)
  if (held > WHOLE * segment.lengthM) {
    return {
      kind: 'refused',
      reason: 'anywhere',
      message: `The rises fit a leak almost anywhere on the segment (${Math.round((100 * held) / segment.lengthM)} % of it).`,
    }
  }
  return { kind: 'located', atM: places[best]!, stretches, throughputPaM3S: throughput, chiSquare }
}

/** Rise at each gauge for 1 Pa m3/s coming in at one place. */
function responses(segment: LeakedSegment, gauges: readonly GaugeRise[], atM: number): number[] {
  const line: SteadyLine = {
    lengthM: segment.lengthM,
    specific: molecularSpecific(segment.gas ?? 'N2', segment.diameterM, segment.temperatureK),
    sourcePerM: 0,
    pumps: segment.pumps,
    leaks: [{ atM, loadPaM3S: 1 }],
    ...(segment.sections && {
      pieces: segment.sections.map(({ lengthM, diameterM }) => ({
        lengthM,
        specific: molecularSpecific(segment.gas ?? 'N2', diameterM, segment.temperatureK),
      })),
    }),
  }
  const positions = linePositions(
    line,
    gauges.map((g) => g.atM),
  )
  const pressures = steadyPressures(line, positions)
  return gauges.map((g) => {
    let nearest = 0
    for (let i = 1; i < positions.length; i++) {
      if (Math.abs(positions[i]! - g.atM) < Math.abs(positions[nearest]! - g.atM)) nearest = i
    }
    return pressures[nearest]!
  })
}

// The scale error grows with the rise that the model expects, so the weights follow the throughput: a few rounds settle.
function fitAt(
  response: readonly number[],
  rises: readonly number[],
  quiet: readonly number[],
  scale: number,
): { chiSquare: number; throughput: number } {
  let throughput = Math.max(...rises.map((rise, i) => rise / response[i]!), Number.MIN_VALUE)
  let chiSquare = Infinity
  for (let round = 0; round < 12; round++) {
    const weights = response.map((r, i) => 1 / (quiet[i]! ** 2 + (scale * throughput * r) ** 2))
    let top = 0
    let bottom = 0
    for (const [i, r] of response.entries()) {
      top += weights[i]! * r * rises[i]!
      bottom += weights[i]! * r * r
    }
    throughput = Math.max(top / bottom, Number.MIN_VALUE)
    chiSquare = rises.reduce((sum, rise, i) => sum + weights[i]! * (rise - throughput * response[i]!) ** 2, 0)
  }
  return { chiSquare, throughput }
}

function stretchesOf(places: readonly number[], holds: (index: number) => boolean): [number, number][] {
  const half = places[1]! / 2
  const last = places[places.length - 1]!
  const found: [number, number][] = []
  let open = false
  for (let i = 0; i < places.length; i++) {
    const inside = holds(i)
    const from = Math.max(0, places[i]! - half)
    const to = Math.min(last, places[i]! + half)
    if (inside && open) found[found.length - 1]![1] = to
    else if (inside) found.push([from, to])
    open = inside
  }
  return found
}

function requireSegment(segment: LeakedSegment, gauges: readonly GaugeRise[], errors: LocatorErrors): void {
  requirePositive('lengthM', segment.lengthM)
  requirePositive('diameterM', segment.diameterM)
  requireWithin('errors.repeat', errors.repeat, 1e-4, 1)
  requireWithin('errors.scale', errors.scale, 0, 1)
  if (!segment.pumps.some((pump) => pump.speedM3S > 0)) {
    throw new PhysicsError('number of running pumps', 0, 'at least 1 on the segment')
  }
  for (const [i, gauge] of gauges.entries()) {
    requireWithin(`gauges[${i}].atM`, gauge.atM, 0, segment.lengthM)
    requireWithin(`gauges[${i}].beforePa`, gauge.beforePa, Number.MIN_VALUE, 1e6)
    requireWithin(`gauges[${i}].afterPa`, gauge.afterPa, Number.MIN_VALUE, 1e6)
  }
}
