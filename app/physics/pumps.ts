/** Pumps: speed against pressure and gas, what gets away, and how long the simplest volume takes. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { crossSection } from './conductance.ts'
import { PhysicsError } from './errors.ts'
import { type Gas, meanSpeed } from './gases.ts'

/** Seconds to pump a volume from one pressure to another at constant speed towards an ultimate pressure. */
export function pumpDownSeconds(
  volumeM3: number,
  speedM3S: number,
  fromPa: number,
  toPa: number,
  ultimatePa = 0,
): number {
  requirePositive('fromPa', fromPa)
  requirePositive('volumeM3', volumeM3)
  requirePositive('speedM3S', speedM3S)
  requireWithin('ultimatePa', ultimatePa, 0, fromPa)
  requireWithin('toPa', toPa, ultimatePa + Number.MIN_VALUE, fromPa)
  return (volumeM3 / speedM3S) * Math.log((fromPa - ultimatePa) / (toPa - ultimatePa))
}

/** Steady pressure over a pump with this gas load, Pa: p_u + Q/S. */
export function steadyPressure(loadPaM3S: number, speedM3S: number, ultimatePa = 0): number {
  requireWithin('ultimatePa', ultimatePa, 0, 1e6)
  requirePositive('speedM3S', speedM3S)
  requireWithin('loadPaM3S', loadPaM3S, 0, 1e9)
  return ultimatePa + loadPaM3S / speedM3S
}

/**
 * How a pump takes gas at the pressure of its mouth. `displacement` pumps (rotary vane, scroll, screw) approach an
 * ultimate pressure; `roots` is a blower before one of them; `turbo` loses speed above p_t as its blades leave
 * molecular flow; `ion` is a saturated sputter pump of a nominal speed.
 */
export type PumpCurve =
  | { readonly kind: 'constant'; readonly speedM3S: number }
  | { readonly kind: 'displacement'; readonly speedM3S: number; readonly ultimatePa: number }
  | RootsCurve
  | {
      readonly kind: 'turbo'
      readonly speedM3S: number
      readonly halfSpeedPa: number
      /** Backing pressure over the compression for this gas, see `turboUltimate`; 0 unless given. */
      readonly ultimatePa?: number
    }
  | { readonly kind: 'ion'; readonly speedM3S: number }

/**
 * A Roots blower. Gas slips back, so it compresses at most K0 times (10 to 50) and has S/(1 + S/(K0 S_b)) left at low
 * pressure; its bypass opens at a difference of about 5 kPa, and then the backing pump decides (both from memory, not
 * verified).
 */
export interface RootsCurve {
  readonly kind: 'roots'
  readonly speedM3S: number
  readonly backingM3S: number
  readonly compression: number
  readonly bypassPa: number
  /** Ultimate pressure of the backing pump, Pa; behind the blower it is K0 times lower. */
  readonly backingUltimatePa: number
}

/** Throws on a curve that no pump has, naming the number. */
export function requirePumpCurve(curve: PumpCurve): void {
  requireWithin('speedM3S', curve.speedM3S, 0, 1e6)
  if (curve.kind === 'displacement') requireWithin('ultimatePa', curve.ultimatePa, 0, 1e5)
  if (curve.kind === 'turbo') {
    requirePositive('halfSpeedPa', curve.halfSpeedPa)
    requireWithin('ultimatePa', curve.ultimatePa ?? 0, 0, 1e5)
  }
  if (curve.kind !== 'roots') return
  requirePositive('backingM3S', curve.backingM3S)
  requireWithin('compression', curve.compression, 1, 1e4)
  requireWithin('bypassPa', curve.bypassPa, 0, 1e5)
  requireWithin('backingUltimatePa', curve.backingUltimatePa, 0, 1e5)
}

/** Throughput S(p) p at the mouth, Pa m3/s at the gas temperature there. Never negative: no gas comes back. */
export function pumpThroughput(curve: PumpCurve, pressurePa: number): number {
  switch (curve.kind) {
    case 'constant':
      return curve.speedM3S * pressurePa
    case 'displacement':
      return curve.speedM3S * Math.max(0, pressurePa - curve.ultimatePa)
    case 'roots': {
      const above = pressurePa - curve.backingUltimatePa / curve.compression
      return above <= 0 ? 0 : Math.min(blownSpeed(curve) * above, bypassed(curve, pressurePa))
    }
    case 'turbo':
      return (
        (curve.speedM3S * Math.max(0, pressurePa - (curve.ultimatePa ?? 0))) /
        (1 + pressurePa / curve.halfSpeedPa)
      )
    case 'ion':
      return curve.speedM3S * saturatedIonPumpShare(pressurePa) * pressurePa
  }
}

/** Slope of `pumpThroughput` over the pressure, m3/s. */
export function pumpThroughputSlope(curve: PumpCurve, pressurePa: number): number {
  switch (curve.kind) {
    case 'constant':
      return curve.speedM3S
    case 'displacement':
      return pressurePa > curve.ultimatePa ? curve.speedM3S : 0
    case 'roots': {
      const above = pressurePa - curve.backingUltimatePa / curve.compression
      if (above <= 0) return 0
      const speed = blownSpeed(curve)
      return speed * above < bypassed(curve, pressurePa) ? speed : curve.backingM3S
    }
    case 'turbo': {
      const ultimatePa = curve.ultimatePa ?? 0
      if (pressurePa < ultimatePa) return 0
      const slower = 1 + pressurePa / curve.halfSpeedPa
      return (curve.speedM3S * (1 + ultimatePa / curve.halfSpeedPa)) / slower ** 2
    }
    case 'ion':
      return curve.speedM3S * (saturatedIonPumpShare(pressurePa) + ionPumpShareSlope(pressurePa))
  }
}

function blownSpeed({ speedM3S, backingM3S, compression }: RootsCurve): number {
  return speedM3S / (1 + speedM3S / (compression * backingM3S))
}

// With the bypass open the backing pump sees the mouth's pressure and the difference on top.
function bypassed({ backingM3S, bypassPa }: RootsCurve, pressurePa: number): number {
  return backingM3S * (pressurePa + bypassPa)
}

/** Pressure in Pa at which a turbo pump gains no more on a gas: its backing pressure over the compression for it. */
export function turboUltimate(backingPa: number, compression: number): number {
  requireWithin('backingPa', backingPa, 0, 1e5)
  requireWithin('compression', compression, 1, 1e15)
  return backingPa / compression
}

/** Speed for a gas over the speed for nitrogen; the middle of what is usual (from memory, not verified). */
const GAS_SHARE: Readonly<Record<'turbo' | 'ion', Readonly<Partial<Record<Gas, number>>>>> = {
  turbo: { H2: 0.85, He: 0.95, H2O: 1, N2: 1, CO: 1, Ar: 0.95 },
  ion: { H2: 2, He: 0.2, CH4: 0.9, H2O: 1, N2: 1, CO: 1, O2: 0.75, Ar: 0.03, CO2: 1 },
}

/** Speed for a gas of a pump that has `nitrogenM3S` for nitrogen, m3/s. Throws on a gas without a known share. */
export function speedFor(kind: 'turbo' | 'ion', gas: Gas, nitrogenM3S: number): number {
  requireWithin('nitrogenM3S', nitrogenM3S, 0, 1e6)
  const share = GAS_SHARE[kind][gas]
  if (share === undefined)
    throw new PhysicsError(`share of ${gas} for a ${kind} pump`, Number.NaN, 'a gas with a known share')
  return share * nitrogenM3S
}

/**
 * Speed of a saturated ion pump over its nominal speed, by pressure (practice, 30 % either way, from memory, not
 * verified). Pairs of Pa and share.
 */
const SATURATED_ION_PUMP: readonly (readonly [number, number])[] = [
  [1e-9, 0.35],
  [1e-8, 0.45],
  [1e-7, 0.6],
  [1e-6, 0.8],
  [1e-5, 0.95],
  [1e-4, 1],
  [1e-3, 0.75],
  [1e-2, 0.25],
  [1e-1, 0],
]

/** Share of its nominal speed that a saturated ion pump has at a pressure: linear in ln p between known points. */
export function saturatedIonPumpShare(pressurePa: number): number {
  requirePositive('pressurePa', pressurePa)
  const points = SATURATED_ION_PUMP
  if (pressurePa <= points[0]![0]) return points[0]![1]
  for (let i = 1; i < points.length; i++) {
    const [high, share] = points[i]!
    const [low, before] = points[i - 1]!
    if (pressurePa <= high)
      return before + ((share - before) * Math.log(pressurePa / low)) / Math.log(high / low)
  }
  return 0
}

// Slope of the share over ln p, which is zero outside the known points.
function ionPumpShareSlope(pressurePa: number): number {
  const points = SATURATED_ION_PUMP
  if (pressurePa <= points[0]![0]) return 0
  for (let i = 1; i < points.length; i++) {
    const [high, share] = points[i]!
    const [low, before] = points[i - 1]!
    if (pressurePa <= high) return (share - before) / Math.log(high / low)
  }
  return 0
}

/** Speed of a getter film per metre of tube, s pi d v/4, m2/s, at sticking `sticking`. */
export function getterSpeedPerMetre(
  gas: Gas,
  diameterM: number,
  sticking: number,
  temperatureK: number,
): number {
  requirePositive('diameterM', diameterM)
  requireWithin('sticking', sticking, 0, 1)
  return (sticking * Math.PI * diameterM * meanSpeed(gas, temperatureK)) / 4
}

/** Speed of a cold surface of the size of the tube's mouth that keeps a share `capture` of what strikes it, m3/s. */
export function captureSpeed(gas: Gas, mouthDiameterM: number, capture: number, gasK: number): number {
  requireWithin('capture', capture, 0, 1)
  return (capture * crossSection(mouthDiameterM) * meanSpeed(gas, gasK)) / 4
}

/** Seconds until a getter of this capacity (Pa m3) is full at a steady gas load. */
export function getterLife(capacityPaM3: number, loadPaM3S: number): number {
  requirePositive('capacityPaM3', capacityPaM3)
  requirePositive('loadPaM3S', loadPaM3S)
  return capacityPaM3 / loadPaM3S
}
