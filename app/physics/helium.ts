/** From a helium signal to the air that comes through the same leak. Throughputs in Pa m3/s at the same temperature. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { GAS_DATA, viscosity } from './gases.ts'

export type LeakFlow = 'molecular' | 'laminar'

// Small leaks pass molecules one by one, large ones a stream. Printed advice puts the change near 1e-7 Pa m3/s, trials
// have seen molecular flow up to 1e-5 Pa m3/s of helium; between the two both factors stay possible.
const SURELY_MOLECULAR_PAM3S = 1e-7
const SURELY_LAMINAR_PAM3S = 1e-5

/** Air over helium throughput of one leak with one atmosphere outside: sqrt(M_He/M_air), or eta_He/eta_air. */
export function airOverHelium(flow: LeakFlow, temperatureK: number): number {
  requirePositive('temperatureK', temperatureK)
  if (flow === 'molecular') return Math.sqrt(GAS_DATA.He.molarMass / GAS_DATA.air.molarMass)
  return viscosity('He', temperatureK) / viscosity('air', temperatureK)
}

/** Time after which a steady helium leak shows 63 % of its signal, s: volume over helium speed. */
export function heliumResponseSeconds(volumeM3: number, heliumSpeedM3S: number): number {
  requirePositive('volumeM3', volumeM3)
  requirePositive('heliumSpeedM3S', heliumSpeedM3S)
  return volumeM3 / heliumSpeedM3S
}

/** Share of the full signal after helium has been outside for `sprayedSeconds`. */
export function signalShare(sprayedSeconds: number, responseSeconds: number): number {
  requireWithin('sprayedSeconds', sprayedSeconds, 0, 1e9)
  requirePositive('responseSeconds', responseSeconds)
  return -Math.expm1(-sprayedSeconds / responseSeconds)
}

export interface HeliumReading {
  /** Helium throughput read above the background. */
  heliumPaM3S: number
  /** Share of helium in the gas outside the leak, 0 to 1 (bag, hood or jet). */
  heliumShare: number
  temperatureK: number
  /** With both, a signal that had not yet come up is scaled to its full height. */
  sprayedSeconds?: number
  responseSeconds?: number
}

export interface AirLeak {
  /** Air through the leak with one atmosphere outside: lowest and highest that the reading allows. */
  lowPaM3S: number
  highPaM3S: number
  /** Null where both kinds of flow stay possible. */
  flow: LeakFlow | null
  /** Helium throughput with pure helium outside and the signal fully up. */
  fullHeliumPaM3S: number
  /** Share of the signal that had come up. */
  share: number
}

/**
 * Air leak that a helium reading stands for. Throws PhysicsError when less than 5 % of the signal can have come up:
 * scaling so little would multiply its noise twentyfold.
 */
export function airLeakFrom(reading: HeliumReading): AirLeak {
  const { heliumPaM3S, heliumShare, temperatureK, sprayedSeconds, responseSeconds } = reading
  requirePositive('heliumPaM3S', heliumPaM3S)
  requireWithin('heliumShare', heliumShare, 1e-6, 1)
  const share =
    sprayedSeconds === undefined || responseSeconds === undefined
      ? 1
      : signalShare(sprayedSeconds, responseSeconds)
  requireWithin('share of the signal that had come up', share, 0.05, 1)
  const full = heliumPaM3S / heliumShare / share
  const molecular = full * airOverHelium('molecular', temperatureK)
  const laminar = full * airOverHelium('laminar', temperatureK)
  const flow = full <= SURELY_MOLECULAR_PAM3S ? 'molecular' : full >= SURELY_LAMINAR_PAM3S ? 'laminar' : null
  return {
    lowPaM3S: flow === 'laminar' ? laminar : molecular,
    highPaM3S: flow === 'molecular' ? molecular : laminar,
    flow,
    fullHeliumPaM3S: full,
    share,
  }
}
