/** Wall temperature over time as straight pieces between corners, and the age of the hydrogen in it. */
import { requireFinite, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'
import { type Diffusivity, transformedTime } from './hydrogen.ts'

/** Corners in ascending time; before the first and after the last the temperature stays. */
export type TemperatureCorners = readonly { readonly atS: number; readonly kelvin: number }[]

export interface Programme {
  readonly cornersS: Float64Array
  readonly cornersK: Float64Array
}

/** Checks the corners and makes them quick to read. */
export function temperatureProgramme(corners: TemperatureCorners): Programme {
  requireWithin('number of corners', corners.length, 1, 1e6)
  for (const [i, corner] of corners.entries()) {
    requireFinite('atS', corner.atS)
    requireWithin('kelvin', corner.kelvin, 1, 3000)
    if (i > 0 && !(corner.atS > corners[i - 1]!.atS)) {
      throw new PhysicsError('time of a corner, s', corner.atS, 'a time after the corner before it')
    }
  }
  return {
    cornersS: Float64Array.from(corners, (corner) => corner.atS),
    cornersK: Float64Array.from(corners, (corner) => corner.kelvin),
  }
}

/** Temperature in K at a time. */
export function temperatureAt(programme: Programme, seconds: number): number {
  const { cornersS, cornersK } = programme
  const last = cornersS.length - 1
  if (seconds <= cornersS[0]!) return cornersK[0]!
  if (seconds >= cornersS[last]!) return cornersK[last]!
  const i = pieceAt(cornersS, seconds)
  const share = (seconds - cornersS[i]!) / (cornersS[i + 1]! - cornersS[i]!)
  return cornersK[i]! + share * (cornersK[i + 1]! - cornersK[i]!)
}

// Last corner at or before `seconds`, found by halving.
function pieceAt(cornersS: Float64Array, seconds: number): number {
  let low = 0
  let high = cornersS.length - 1
  while (high - low > 1) {
    const middle = (low + high) >> 1
    if (cornersS[middle]! <= seconds) low = middle
    else high = middle
  }
  return low
}

/**
 * Integral of the diffusivity of hydrogen from `fromS` to later times, m2. The sums up to the corners are kept, so a
 * call costs one piece.
 */
export function hydrogenAge(
  programme: Programme,
  fromS: number,
  law?: Diffusivity,
): (seconds: number) => number {
  const inner = Array.from(programme.cornersS).filter((atS) => atS > fromS)
  const starts = [fromS, ...inner]
  const sums = [0]
  for (const [i, atS] of inner.entries()) sums.push(sums[i]! + span(programme, starts[i]!, atS, law))
  return (seconds) => {
    requireWithin('seconds', seconds, fromS, 1e12)
    let i = starts.length - 1
    while (i > 0 && starts[i]! > seconds) i--
    return sums[i]! + span(programme, starts[i]!, seconds, law)
  }
}

function span(programme: Programme, fromS: number, toS: number, law?: Diffusivity): number {
  const piece = {
    seconds: toS - fromS,
    fromK: temperatureAt(programme, fromS),
    toK: temperatureAt(programme, toS),
  }
  return transformedTime([piece], law)
}
