/**
 * The highest temperatures that parts of a tube line stand while it is baked. Values of practice, from memory, not
 * verified unless marked: the maker's sheet of the very part always goes before this table.
 */
import { requireWithin } from './argument-checks.ts'

export type BakedPart =
  | 'elastomer-gate-valve-closed'
  | 'elastomer-gate-valve-open'
  | 'metal-gate-valve'
  | 'fluoroelastomer-seal'
  | 'perfluoroelastomer-seal'
  | 'nitrile-seal'
  | 'ethylene-propylene-seal'
  | 'actuator'
  | 'position-switch'
  | 'hot-cathode-head'
  | 'cold-cathode-head'
  | 'thermal-gauge-head'
  | 'capacitance-head'
  | 'spectrometer-head'
  | 'turbo-pump-flange'
  | 'ion-pump-operating'
  | 'ion-pump-with-magnets'
  | 'ion-pump-cable'
  | 'silica-window'
  | 'bonded-window'
  | 'copper-gasket'
  | 'aluminium-gasket'
  | 'indium-seal'

export interface PartLimit {
  /** Highest temperature for long, degrees Celsius: the careful end where practice spreads. */
  celsius: number
  /** What must hold for that value, or null. */
  condition: string | null
  /** 'seen in print' or 'from memory, not verified'. */
  provenance: 'seen in print' | 'from memory, not verified'
}

function remembered(celsius: number, condition: string | null = null): PartLimit {
  return { celsius, condition, provenance: 'from memory, not verified' }
}

function printed(celsius: number, condition: string | null = null): PartLimit {
  return { celsius, condition, provenance: 'seen in print' }
}

export const PART_LIMITS: Readonly<Record<BakedPart, PartLimit>> = {
  'elastomer-gate-valve-closed': remembered(120, 'closed, no stress on the seal'),
  'elastomer-gate-valve-open': remembered(150, 'open'),
  'metal-gate-valve': remembered(300, 'some makes only while open'),
  'fluoroelastomer-seal': remembered(150, 'up to 200 for hours'),
  'perfluoroelastomer-seal': remembered(250),
  'nitrile-seal': remembered(80),
  'ethylene-propylene-seal': remembered(120),
  actuator: remembered(80, 'taken off for hotter bakes'),
  'position-switch': remembered(80),
  'hot-cathode-head': remembered(200, 'electronics off'),
  'cold-cathode-head': remembered(150, 'magnet may stay'),
  'thermal-gauge-head': remembered(80, 'electronics off'),
  'capacitance-head': remembered(100),
  'spectrometer-head': remembered(200, 'electronics off; multiplier operated to 150 only'),
  'turbo-pump-flange': printed(100),
  'ion-pump-operating': printed(250),
  'ion-pump-with-magnets': printed(350),
  'ion-pump-cable': remembered(150),
  'silica-window': remembered(200, 'at most 3 K a minute and 25 K across the glass'),
  'bonded-window': remembered(120),
  'copper-gasket': remembered(450),
  'aluminium-gasket': remembered(150),
  'indium-seal': remembered(100),
}

/** A part on the line: which kind, what it is called, and its own limit where the maker's sheet gives one. */
export interface PartOnLine {
  kind: BakedPart
  name: string
  ownLimitC?: number
  /**
   * Share of the tube's rise over its surroundings that the part takes part in, 0 to 1; 1 unless given. A valve bonnet
   * that sticks out of the insulation stays well below 1 (measure it; about 0.7 is common practice, no source).
   */
  riseShare?: number
}

export interface Objection {
  part: PartOnLine
  limit: PartLimit
  /** Temperature the part would reach, degrees Celsius. */
  reachesC: number
  /** Kelvins by which it would exceed its limit. */
  excessK: number
}

/**
 * Parts that a bake of the tube at `celsius` in surroundings of `ambientC` would overheat, the worst first. Parts taken
 * off the line are not to be passed.
 */
export function objectionsTo(celsius: number, ambientC: number, parts: readonly PartOnLine[]): Objection[] {
  requireWithin('ambientC', ambientC, -50, 60)
  requireWithin('celsius', celsius, ambientC, 1000)
  return parts
    .map((part) => {
      const limit = limitOf(part)
      const reachesC = ambientC + shareOf(part) * (celsius - ambientC)
      return { part, limit, reachesC, excessK: reachesC - limit.celsius }
    })
    .filter((o) => o.excessK > 1e-9)
    .sort((a, b) => b.excessK - a.excessK)
}

/** Hottest tube in degrees Celsius that every part stands, and the part that sets it; null without parts. */
export function hottestBake(
  ambientC: number,
  parts: readonly PartOnLine[],
): { celsius: number; setBy: PartOnLine } | null {
  requireWithin('ambientC', ambientC, -50, 60)
  let best: { celsius: number; setBy: PartOnLine } | null = null
  for (const part of parts) {
    const celsius = ambientC + (limitOf(part).celsius - ambientC) / shareOf(part)
    if (!best || celsius < best.celsius) best = { celsius, setBy: part }
  }
  return best
}

function shareOf(part: PartOnLine): number {
  const share = part.riseShare ?? 1
  requireWithin(`rise share of ${part.name}`, share, 0.01, 1)
  return share
}

function limitOf(part: PartOnLine): PartLimit {
  if (part.ownLimitC === undefined) return PART_LIMITS[part.kind]
  requireWithin(`limit of ${part.name}`, part.ownLimitC, 0, 1000)
  return { celsius: part.ownLimitC, condition: 'from its own sheet', provenance: 'seen in print' }
}
