/** Pumps: speed against pressure and gas, what gets away, and how long the simplest volume takes. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { crossSection } from './conductance.ts'
import { type Gas, meanSpeed } from './gases.ts'

/** Seconds to pump a volume from one pressure to another at constant speed towards an ultimate pressure. */
export function pumpDownSeconds(
  volumeM3: number,
  speedM3S: number,
  fromPa: number,
  toPa: number,
  ultimatePa = 0,
): number {
  requirePositive('volumeM3', volumeM3)
  requirePositive('speedM3S', speedM3S)
  requireWithin('ultimatePa', ultimatePa, 0, fromPa)
  requireWithin('toPa', toPa, ultimatePa + Number.MIN_VALUE, fromPa)
  return (volumeM3 / speedM3S) * Math.log((fromPa - ultimatePa) / (toPa - ultimatePa))
}

/** Steady pressure over a pump with this gas load, Pa: p_u + Q/S. */
export function steadyPressure(loadPaM3S: number, speedM3S: number, ultimatePa = 0): number {
  requirePositive('speedM3S', speedM3S)
  requireWithin('loadPaM3S', loadPaM3S, 0, 1e9)
  return ultimatePa + loadPaM3S / speedM3S
}

/**
 * How a pump takes gas at the pressure of its mouth. `displacement` pumps (rotary vane, scroll, screw) approach an
 * ultimate pressure; `turbo` loses speed above p_t as its blades leave molecular flow.
 */
export type PumpCurve =
  | { readonly kind: 'constant'; readonly speedM3S: number }
  | { readonly kind: 'displacement'; readonly speedM3S: number; readonly ultimatePa: number }
  | { readonly kind: 'turbo'; readonly speedM3S: number; readonly halfSpeedPa: number }

/** Throughput S(p) p at the mouth, Pa m3/s at the gas temperature there. Never negative: no gas comes back. */
export function pumpThroughput(curve: PumpCurve, pressurePa: number): number {
  if (curve.kind === 'constant') return curve.speedM3S * pressurePa
  if (curve.kind === 'displacement') return curve.speedM3S * Math.max(0, pressurePa - curve.ultimatePa)
  return (curve.speedM3S * pressurePa) / (1 + pressurePa / curve.halfSpeedPa)
}

/** Slope of `pumpThroughput` over the pressure, m3/s. */
export function pumpThroughputSlope(curve: PumpCurve, pressurePa: number): number {
  if (curve.kind === 'constant') return curve.speedM3S
  if (curve.kind === 'displacement') return pressurePa > curve.ultimatePa ? curve.speedM3S : 0
  return curve.speedM3S / (1 + pressurePa / curve.halfSpeedPa) ** 2
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
