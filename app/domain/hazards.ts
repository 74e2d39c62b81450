/**
 * Cautions of a heated-segment permit: for every hazard the figures of these segments, the precautions that go with it
 * and the thresholds it rests on. Everything is computed from the register and from what the permit says; nothing is
 * stored, so a change of terms changes the figures.
 */
import type { BakedSegment } from './bake-load.ts'
import {
  type AdoptedThreshold,
  NOT_SET,
  THRESHOLDS,
  type ThresholdKey,
  type ThresholdStanding,
  thresholdStanding,
} from './hazard-thresholds.ts'
import { arc, magneticField, radioNoise, shock, xRay } from './hazards/electrical.ts'
import { figure } from './hazards/figures.ts'
import { gasCylinders, oxygen, tubeEntry, ventPressure } from './hazards/gas.ts'
import { elastomer, fire, heatStress, hotSurface, insulationDust } from './hazards/heat.ts'
import { expansion, lifting, loneWork, storedEnergy } from './hazards/mechanics.ts'
import type { PermitContent } from './permit-content.ts'
import type { UnadoptedThreshold } from './permit-facts.ts'
import { HAZARD_KEYS, HAZARD_LABELS, type HazardKey } from './permit-words.ts'

/** What the register knows of the plant that a permit names. Lengths in metres. */
export interface HazardGround {
  content: PermitContent
  ambientC: number
  segments: readonly BakedSegment[]
  /** The supply set that the permit names; null where it names none or the register has no such set. */
  supply: { tag: string; maxAmps: number; maxVolts: number; openCircuitVolts: number } | null
  heaters: readonly {
    tag: string
    kind: 'direct-current' | 'blanket'
    volts: number | null
    powerW: number | null
    earthing: string
  }[]
  /** Valves of the segments and the gates at their ends. */
  valves: readonly { tag: string; seal: string; limitC: number; partRiseShare: number }[]
  /** Space that vented gas would mix into, and where its size is taken from. */
  bay: { volumeM3: number; basis: string }
  /** Adoptions in force, by key. */
  adopted: Readonly<Partial<Record<ThresholdKey, number>>>
}

export interface HazardFact {
  name: string
  /** The figure with its unit, or a few words where there is none. */
  value: string
  /** How it was worked out, inputs named. */
  how: string
  /** Where the formula or the figure comes from, edition where known. */
  source: string
}

/** What one hazard comes to on this ground. */
export interface HazardFinding {
  facts: HazardFact[]
  /** What is beyond a limit, as sentences; empty where nothing is. */
  findings: string[]
  /** Thresholds that this caution rests on here. */
  thresholds: ThresholdKey[]
  /** The usual precautions. */
  precautions: string[]
}

export interface HazardThreshold {
  key: ThresholdKey
  label: string
  standing: ThresholdStanding
  /** The adopted value with its unit, or "not set by site". */
  text: string
  /** Source, edition, who adopted it; why it does not count where it does not. */
  detail: string
}

/** One caution of a permit, ready to be shown or printed. */
export interface HazardView {
  key: HazardKey
  label: string
  /** The requester's answer: null while there is none. */
  applies: boolean | null
  /** The requester's precautions at this segment, or why it does not apply. */
  text: string
  facts: HazardFact[]
  findings: string[]
  precautions: string[]
  thresholds: HazardThreshold[]
}

/** Stands below every list of cautions. */
export const STANDING_SENTENCE =
  'This form gives way to local law, to the rules of this site, to the judgement of licensed persons and to what the makers of the equipment prescribe. Where two of them differ, follow the stricter one.'

const WORK: Record<HazardKey, (ground: HazardGround) => HazardFinding> = {
  'hot-surface': hotSurface,
  shock,
  arc,
  expansion,
  'stored-energy': storedEnergy,
  'vent-pressure': ventPressure,
  oxygen,
  'tube-entry': tubeEntry,
  fire,
  elastomer,
  'insulation-dust': insulationDust,
  'gas-cylinders': gasCylinders,
  lifting,
  'lone-work': loneWork,
  'magnetic-field': magneticField,
  'radio-noise': radioNoise,
  'heat-stress': heatStress,
  'x-ray': xRay,
}

/** Values in force at an instant, by key: what the figures may be held against. */
export function valuesInForce(
  adoptions: readonly AdoptedThreshold[],
  now: Date,
): Partial<Record<ThresholdKey, number>> {
  return Object.fromEntries(
    adoptions
      .filter((one) => thresholdStanding(one, now) === 'in-force')
      .map(({ key, value }) => [key, value]),
  )
}

/**
 * Every hazard in the order of the form, answered or not.
 *
 * @param adoptions those that nobody has ended; one past its review date counts as not set
 * @param dayText writes a day in site time
 */
export function hazardViews(
  ground: HazardGround,
  adoptions: readonly AdoptedThreshold[],
  now: Date,
  dayText: (at: Date) => string,
): HazardView[] {
  return HAZARD_KEYS.map((key) => {
    const { facts, findings, precautions, thresholds } = WORK[key](ground)
    const answer = ground.content.hazards[key]
    return {
      key,
      label: HAZARD_LABELS[key],
      applies: answer?.applies ?? null,
      text: answer?.text ?? '',
      facts: mergeEqual(
        facts,
        ground.segments.map(({ tag }) => tag),
      ),
      findings,
      precautions,
      thresholds: thresholds.map((each) => thresholdView(each, adoptions, now, dayText)),
    }
  })
}

/** Facts that read alike but for the segment become one that names all of them. */
function mergeEqual(facts: readonly HazardFact[], tags: readonly string[]): HazardFact[] {
  const without = (text: string) => tags.reduce((rest, tag) => rest.replaceAll(tag, '\u0000'), text)
  const alike = (one: HazardFact, other: HazardFact) =>
    one.value === other.value &&
    without(one.name) === without(other.name) &&
    without(one.how) === without(other.how)
  return facts.flatMap((fact, index) => {
    if (facts.findIndex((other) => alike(other, fact)) < index) return []
    const own = tags.filter((tag) => facts.some((other) => alike(other, fact) && other.name.includes(tag)))
    const [first] = own
    if (first === undefined || own.length < 2 || facts.filter((other) => alike(other, fact)).length < 2)
      return [fact]
    return [{ ...fact, name: `${fact.name.replace(first, own.join(' and '))}, each` }]
  })
}

function thresholdView(
  key: ThresholdKey,
  adoptions: readonly AdoptedThreshold[],
  now: Date,
  dayText: (at: Date) => string,
): HazardThreshold {
  const { label } = THRESHOLDS[key]
  const open = adoptions.find((one) => one.key === key) ?? null
  const standing = thresholdStanding(open, now)
  if (open === null || standing === 'not-set') {
    return { key, label, standing: 'not-set', text: NOT_SET, detail: 'No value has been adopted here.' }
  }
  if (standing === 'lapsed') {
    const detail = `The value adopted on ${dayText(open.at)} was to be looked at again by ${dayText(open.reviewAt)} and counts no more.`
    return { key, label, standing, text: NOT_SET, detail }
  }
  const edition = open.edition === '' ? '' : `, ${open.edition}`
  return {
    key,
    label,
    standing,
    text: figure(open.value, open.unit),
    detail: `${open.source}${edition}; adopted by ${open.by} on ${dayText(open.at)}, to be looked at again by ${dayText(open.reviewAt)}.`,
  }
}

/** Cautions that rest on a value which the site has not adopted. A hazard that was said not to apply asks for none. */
export function unadoptedOf(views: readonly HazardView[]): UnadoptedThreshold[] {
  return views
    .filter(({ applies }) => applies !== false)
    .flatMap(({ key, label, thresholds }) =>
      thresholds
        .filter(({ standing }) => standing !== 'in-force')
        .map((one) => ({
          hazard: key,
          threshold: one.key,
          text: `${label} rests on “${one.label}”, which is ${NOT_SET}. ${one.detail} A safety officer can adopt one under Permits, Thresholds.`,
        })),
    )
}
