/**
 * Hydrogen from the wall of the tube: diffusion out of a sheet with both faces at vacuum, the empirical law of
 * low-hydrogen steel, and release limited by recombination. Amounts of hydrogen in steel are atoms per m3; a
 * molecule takes two.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { AVOGADRO, BOLTZMANN, GAS_CONSTANT, T20_K } from './constants.ts'

/** Diffusivity D0 exp(-E/RT). */
export interface Diffusivity {
  readonly d0M2S: number
  readonly energyJMol: number
}

/**
 * Hydrogen in austenitic steel: San Marchi, Somerday and Robinson, Int. J. Hydrogen Energy 32 (2007) 100
 * (coefficients from memory, not verified). Authors differ by a factor of two at 20 degrees.
 */
export const AUSTENITIC_DIFFUSIVITY: Diffusivity = { d0M2S: 8.9e-7, energyJMol: 53.9e3 }

/** Grant, Cummings and Blackburn (1988) for type 316, 7.3e-7 exp(-6300 K/T) m2/s: for comparison. */
export const TYPE_316_DIFFUSIVITY: Diffusivity = { d0M2S: 7.3e-7, energyJMol: 6300 * GAS_CONSTANT }

/** Apparent activation energy of low-hydrogen steel between two temperatures (common practice, no source), J/mol. */
export const LOW_HYDROGEN_ENERGY = 57e3

/**
 * Diffusive age of a sheet as it leaves the mill, m2: its faces are already depleted, about a month at room
 * temperature. Keeps the first flux finite (own choice).
 */
export const MILL_AGE_M2 = 1e-9

/** Density of austenitic steel used to turn weight parts into atoms, kg/m3 (data sheets give 7930 to 8000). */
const STEEL_DENSITY = 7930
/** Molar mass of the hydrogen atom, kg/mol. */
const HYDROGEN_ATOM_MASS = 1.00794e-3

/** Diffusivity of hydrogen at a wall temperature, m2/s. */
export function hydrogenDiffusivity(temperatureK: number, law: Diffusivity = AUSTENITIC_DIFFUSIVITY): number {
  requireWithin('d0M2S', law.d0M2S, 0, 1)
  requireWithin('energyJMol', law.energyJMol, 0, 1e6)
  requirePositive('temperatureK', temperatureK)
  return law.d0M2S * Math.exp(-law.energyJMol / (GAS_CONSTANT * temperatureK))
}

/** Hydrogen atoms per m3 of steel for a content in weight parts per million. */
export function atomsPerM3(weightPpm: number): number {
  requireWithin('weightPpm', weightPpm, 0, 1e4)
  return (weightPpm * 1e-6 * STEEL_DENSITY * AVOGADRO) / HYDROGEN_ATOM_MASS
}

/** Below this Fourier number the short-time series is used: both agree here beyond double precision. */
const SHORT_FOURIER = 0.05

/**
 * Sum over n of exp(-(2n+1)2 pi2 Fo), with Fo = tau/w2 and the full thickness w (Crank, The Mathematics of
 * Diffusion, 1975, section 4.3). Below Fo = 0.05 by its short-time form.
 */
export function slabSum(fourier: number): number {
  requirePositive('fourier', fourier)
  if (fourier < SHORT_FOURIER) {
    let images = 0
    for (let m = 1; m <= 5; m++) images += (m % 2 === 1 ? -2 : 2) * Math.exp(-(m * m) / (4 * fourier))
    return (1 + images) / (4 * Math.sqrt(Math.PI * fourier))
  }
  let sum = 0
  for (let n = 0; n < 20; n++) sum += Math.exp(-((2 * n + 1) ** 2) * Math.PI ** 2 * fourier)
  return sum
}

/** Share of the hydrogen still in the sheet at the Fourier number tau/w2. */
export function slabRemaining(fourier: number): number {
  requireWithin('fourier', fourier, 0, Number.MAX_VALUE)
  // Short times: what has left is 4 sqrt(Fo/pi), with corrections that vanish below 1e-14 here.
  if (fourier < 0.0075) return 1 - 4 * Math.sqrt(fourier / Math.PI)
  let sum = 0
  for (let n = 0; n < 40; n++) {
    const k = (2 * n + 1) ** 2
    sum += Math.exp(-k * Math.PI ** 2 * fourier) / k
  }
  return (8 / Math.PI ** 2) * sum
}

export interface Sheet {
  /** Uniform content at the start, hydrogen atoms per m3. */
  readonly c0PerM3: number
  /** Wall thickness, m. */
  readonly wallM: number
  /** Faces that let hydrogen out: 1 when an oxide blocks the outer one (then the sheet acts as twice as thick). */
  readonly openFaces?: 1 | 2
  readonly law?: Diffusivity
}

/**
 * Hydrogen atoms per m2 and s leaving one face at `temperatureK` after a diffusive age `tauM2`, the integral of D
 * over the whole history: D of now, age of the past. Exact for a uniform temperature through the wall
 * (Calder and Lewin, Br. J. Appl. Phys. 18 (1967) 1459).
 */
export function slabAtomFlux(sheet: Sheet, temperatureK: number, tauM2: number): number {
  requireWithin('c0PerM3', sheet.c0PerM3, 0, 1e30)
  requirePositive('tauM2', tauM2)
  requirePositive('wallM', sheet.wallM)
  const thickness = sheet.openFaces === 1 ? 2 * sheet.wallM : sheet.wallM
  const diffusivity = hydrogenDiffusivity(temperatureK, sheet.law)
  return ((4 * sheet.c0PerM3 * diffusivity) / thickness) * slabSum(tauM2 / thickness ** 2)
}

/** Outgassing rate of the sheet in Pa m/s of hydrogen gas at `gasK` (20 degrees unless given). */
export function slabRate(sheet: Sheet, temperatureK: number, tauM2: number, gasK: number = T20_K): number {
  requirePositive('gasK', gasK)
  return (slabAtomFlux(sheet, temperatureK, tauM2) / 2) * BOLTZMANN * gasK
}

/** One straight piece of a temperature history. */
export interface TemperaturePiece {
  readonly seconds: number
  readonly fromK: number
  readonly toK: number
}

/** Nodes and weights of Gauss and Legendre on (-1, 1), eight points; the other four mirror these. */
const GAUSS_NODES = [0.18343464249565, 0.525532409916329, 0.796666477413627, 0.960289856497536]
const GAUSS_WEIGHTS = [0.362683783378362, 0.313706645877887, 0.222381034453374, 0.101228536290376]
/** A ramp is cut into parts of at most this many K, over which the exponential is nearly a polynomial. */
const RAMP_PART_K = 40

/** Integral of the diffusivity over straight pieces of temperature history, m2. */
export function transformedTime(pieces: readonly TemperaturePiece[], law?: Diffusivity): number {
  let tau = 0
  for (const { seconds, fromK, toK } of pieces) {
    requireWithin('seconds', seconds, 0, 1e11)
    requireWithin('fromK', fromK, 1, 3000)
    requireWithin('toK', toK, 1, 3000)
    const parts = Math.max(1, Math.ceil(Math.abs(toK - fromK) / RAMP_PART_K))
    for (let part = 0; part < parts; part++) {
      const middle = (part + 0.5) / parts
      for (let i = 0; i < 4; i++) {
        const offset = GAUSS_NODES[i]! / (2 * parts)
        const before = hydrogenDiffusivity(fromK + (toK - fromK) * (middle - offset), law)
        const after = hydrogenDiffusivity(fromK + (toK - fromK) * (middle + offset), law)
        tau += ((GAUSS_WEIGHTS[i]! * (before + after)) / 2) * (seconds / parts)
      }
    }
  }
  return tau
}

/**
 * Rate of low-hydrogen steel at `temperatureK`, Pa m/s, from one measured at `atK`. Empirical: traps and surface
 * recombination rule there, and diffusion alone would promise a rate ten thousand times lower than any measured.
 */
export function lowHydrogenRate(
  measuredPaMS: number,
  atK: number,
  temperatureK: number,
  energyJMol: number = LOW_HYDROGEN_ENERGY,
): number {
  requireWithin('energyJMol', energyJMol, 0, 1e6)
  requirePositive('measuredPaMS', measuredPaMS)
  requirePositive('atK', atK)
  requirePositive('temperatureK', temperatureK)
  return measuredPaMS * Math.exp(-(energyJMol / GAS_CONSTANT) * (1 / temperatureK - 1 / atK))
}

/**
 * Content left in a sheet that loses hydrogen only as fast as atoms meet on its two faces, K_r c2 per face:
 * c0/(1 + 2 K_r c0 t/w). `recombinationM4S` in m4/s per atom; it varies tenfold with the state of the surface.
 */
export function recombinedContent(
  c0PerM3: number,
  recombinationM4S: number,
  wallM: number,
  seconds: number,
): number {
  requireWithin('c0PerM3', c0PerM3, 0, 1e30)
  requireWithin('recombinationM4S', recombinationM4S, 0, 1)
  requirePositive('wallM', wallM)
  requireWithin('seconds', seconds, 0, 1e12)
  return c0PerM3 / (1 + (2 * recombinationM4S * c0PerM3 * seconds) / wallM)
}
