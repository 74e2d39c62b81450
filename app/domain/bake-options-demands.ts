/**
 * What a bake at one temperature asks of parts, joints, supplies and cables, against what each can give. Temperatures in
 * °C, power in kW, strokes in mm.
 */
import { expansionM } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'
import { ampsAndVolts, type BakedSegment, powerW } from './bake-load.ts'
import { FEEDERS, type Feeder } from './register.ts'

/** A part of the line with the temperature it stands, and how far it follows the tube. */
export interface OptionPart {
  tag: string
  /** What it is: "gate valve, elastomer bonnet". */
  words: string
  limitC: number
  /** Share of the tube's rise over the surroundings that the part takes part in, above 0 and up to 1. */
  riseShare: number
  /** Taken off or protected for a hotter bake: then it asks for care and binds nothing. */
  removable: boolean
  /** Where the limit comes from. */
  provenance: string
}

export interface OptionSite {
  ambientC: number
  upKH: number
  /** Cooling is over below this. */
  coldC: number
  /** How far the wall may be off its setpoint, kelvins. */
  toleranceK: number
  supplies: readonly { tag: string; maxAmps: number; maxVolts: number }[]
  /** Caps by day and by night, with what else draws on them; null where the site has set none. */
  caps: { dayKW: number | null; nightKW: number | null; baseKW: number }
  feeders: Readonly<Record<Feeder, number | null>>
}

type DemandKind = 'part' | 'stroke' | 'current' | 'voltage' | 'power' | 'feeder'

/** One thing that a bake asks for, and the most that can be given. */
export interface Demand {
  kind: DemandKind
  what: string
  uses: number
  limit: number
  unit: string
  /** How much of the limit is used; above 1 it cannot be done. For a part, of its rise over the surroundings. */
  share: number
  /** What would lift the limit. */
  lift: string
}

interface Heated {
  baked: BakedSegment
  parts: readonly OptionPart[]
}

/** Everything asked for at a temperature, the tightest first. No supply set, no demand on current and voltage. */
export function demandsAt(segments: readonly Heated[], site: OptionSite, celsius: number): Demand[] {
  const demands = [
    ...partDemands(segments, site.ambientC, celsius),
    ...strokes(segments, site.ambientC, celsius).map(strokeDemand),
    ...(supplyDemands(segments, site, celsius)?.demands ?? []),
    ...powerDemands(segments, site, celsius),
  ]
  return demands.sort((a, b) => b.share - a.share)
}

/** Whether a demand is beyond what can be given. */
export function isOver({ share }: Demand): boolean {
  return share > 1 + 1e-9
}

/** A demand beyond its limit, said in a sentence with its figures. */
export function overSentence(celsius: number, { what, uses, limit, unit, lift }: Demand): string {
  return `At ${celsius} °C ${what} would come to ${figure(uses, unit)}; ${figure(limit, unit)} is the limit. ${lift}`
}

/** A figure with its unit, with as many digits as the unit deserves. */
export function figure(value: number, unit: string): string {
  const digits = unit === 'A' || unit === '°C' ? 0 : 1
  const rounded = value.toFixed(digits)
  return `${digits === 0 ? rounded : rounded.replace(/\.0$/, '')} ${unit}`
}

function partDemands(segments: readonly Heated[], ambientC: number, celsius: number): Demand[] {
  const seen = new Set<string>()
  return segments.flatMap(({ parts }) =>
    parts.flatMap((part) => {
      // The gate between two heated segments belongs to both and counts once.
      if (part.removable || seen.has(part.tag)) return []
      seen.add(part.tag)
      const atMost = ambientC + (part.limitC - ambientC) / part.riseShare
      return [
        {
          kind: 'part' as const,
          what: `${part.tag} (${part.words})`,
          uses: reachedBy(part, ambientC, celsius),
          limit: part.limitC,
          unit: '°C',
          share: ((celsius - ambientC) * part.riseShare) / (part.limitC - ambientC),
          lift: `The tube may be at ${Math.floor(atMost)} °C at most; a part that stands more would lift it.`,
        },
      ]
    }),
  )
}

/** Temperature that a part reaches with the tube at `celsius`. */
function reachedBy(part: Pick<OptionPart, 'riseShare'>, ambientC: number, celsius: number): number {
  return ambientC + part.riseShare * (celsius - ambientC)
}

/** Parts that must come off or be protected at a temperature, with what they would reach. */
export function careFor(
  segments: readonly Heated[],
  ambientC: number,
  celsius: number,
): { part: OptionPart; reachesC: number }[] {
  return segments.flatMap(({ parts }) =>
    parts.flatMap((part) => {
      const reachesC = reachedBy(part, ambientC, celsius)
      return part.removable && reachesC > part.limitC ? [{ part, reachesC }] : []
    }),
  )
}

export interface JointStroke {
  tag: string
  mm: number
  ratedMm: number
  bellowsCount: number
}

/** Stroke of one joint of each segment: its growth shared evenly among its bellows, mm. */
export function strokes(segments: readonly Heated[], ambientC: number, celsius: number): JointStroke[] {
  return segments.map(({ baked: { tag, startM, endM, bellowsCount, bellowsRatedMm } }) => {
    const growthM = expansionM(endM - startM, celsiusToKelvin(ambientC), celsiusToKelvin(celsius))
    return { tag, mm: (growthM * 1000) / bellowsCount, ratedMm: bellowsRatedMm, bellowsCount }
  })
}

function strokeDemand({ tag, mm, ratedMm }: JointStroke): Demand {
  return {
    kind: 'stroke',
    what: `each bellows of ${tag}`,
    uses: mm,
    limit: ratedMm,
    unit: 'mm',
    share: mm / ratedMm,
    lift: 'A cooler bake, or bellows rated for a longer stroke, would lift it.',
  }
}

/** The supply set that is strained least at the end of the ramp; null where the register has none. */
export function supplyDemands(
  segments: readonly Heated[],
  site: OptionSite,
  celsius: number,
): { tag: string; amps: number; volts: number; demands: Demand[] } | null {
  const { amps, volts } = ampsAndVolts(
    segments.map(({ baked }) => baked),
    site.ambientC,
    celsius,
    site.upKH,
  )
  const strain = (set: OptionSite['supplies'][number]): number =>
    Math.max(amps / set.maxAmps, volts / set.maxVolts)
  const [best] = [...site.supplies].sort((a, b) => strain(a) - strain(b))
  if (best === undefined) return null
  const lift =
    segments.length > 1
      ? 'A slower ramp, or the two heated apart, would lift it.'
      : 'A slower ramp or a stronger set would lift it.'
  const demand = (kind: 'current' | 'voltage', uses: number, limit: number, unit: string): Demand => ({
    kind,
    what: `the ${kind} of ${best.tag} at the end of the ramp`,
    uses,
    limit,
    unit,
    share: uses / limit,
    lift,
  })
  return {
    tag: best.tag,
    amps,
    volts,
    demands: [demand('current', amps, best.maxAmps, 'A'), demand('voltage', volts, best.maxVolts, 'V')],
  }
}

/** Highest power of the bake, at the end of its ramp, kW. */
export function peakKW(segments: readonly Heated[], site: OptionSite, celsius: number): number {
  return segments.reduce((sum, { baked }) => sum + rampEndKW(baked, site, celsius), 0)
}

function rampEndKW(baked: BakedSegment, { ambientC, upKH }: OptionSite, celsius: number): number {
  return powerW(baked, ambientC, celsius, upKH).totalW / 1000
}

function powerDemands(segments: readonly Heated[], site: OptionSite, celsius: number): Demand[] {
  const { dayKW, nightKW, baseKW } = site.caps
  const demands: Demand[] = []
  const caps = [dayKW, nightKW].filter((cap) => cap !== null)
  if (caps.length > 0) {
    const uses = peakKW(segments, site, celsius) + baseKW
    const limit = Math.max(...caps)
    demands.push({
      kind: 'power',
      what: `the power at the end of the ramp, with ${figure(baseKW, 'kW')} of base load,`,
      uses,
      limit,
      unit: 'kW',
      share: uses / limit,
      lift: 'A slower ramp, or a higher cap, would lift it.',
    })
  }
  for (const name of FEEDERS) {
    const limit = site.feeders[name]
    const own = segments.filter(({ baked }) => baked.feeder === name)
    if (limit === null || own.length === 0) continue
    const uses = peakKW(own, site, celsius)
    demands.push({
      kind: 'feeder',
      what: `the load of feeder ${name} at the end of the ramp`,
      uses,
      limit,
      unit: 'kW',
      share: uses / limit,
      lift: 'A slower ramp, or a stronger feeder, would lift it.',
    })
  }
  return demands
}
