/**
 * Thresholds that cautions rest on. What has been published is shown as information; a caution holds a value against
 * the plant only once this site has adopted one, in its own words, with a date on which it is looked at again.
 */
import type { HazardKey } from './permit-words.ts'

/** How well the published value is known here. */
export const PROVENANCE_WORDS = {
  checked: 'checked against its text',
  quoted: 'seen quoted, not checked against its text',
  memory: 'from memory, not verified',
  own: 'common practice, no source',
} as const
export type Provenance = keyof typeof PROVENANCE_WORDS

export interface PublishedValue {
  text: string
  source: string
  edition: string
  provenance: Provenance
}

export interface ThresholdFacts {
  label: string
  /** What it is for, in a sentence. */
  meaning: string
  unit: string
  /** Values outside this are taken for a slip of the pen. */
  least: number
  most: number
  /** The direction in which it is more careful. */
  careful: 'lower' | 'higher'
  /** The published value as a number, to say that an adopted one is less careful; null where there is none. */
  usual: number | null
  published: readonly PublishedValue[]
  hazards: readonly HazardKey[]
}

const BURNS = { source: 'ISO 13732-1', edition: 'edition not known', provenance: 'memory' } as const

const FACTS = {
  'touch-limit': {
    label: 'Free access',
    meaning: 'Hottest surface, by contact probe, up to which people come to the tube with bare hands.',
    unit: '°C',
    least: 20,
    most: 70,
    careful: 'lower',
    usual: 43,
    published: [
      { text: 'metal held for 8 hours or more: 43 °C', ...BURNS },
      { text: 'metal held for 10 minutes: 48 °C', ...BURNS },
    ],
    hazards: ['hot-surface'],
  },
  'burn-second': {
    label: 'Burn at a short touch',
    meaning: 'Bare metal from which skin is taken to burn within about a second.',
    unit: '°C',
    least: 40,
    most: 80,
    careful: 'lower',
    usual: 65,
    published: [
      { text: 'metal touched for about 1 second: 65 to 70 °C', ...BURNS },
      {
        text: 'metal below 65 °C touched for less than half a second: no burn expected',
        source: 'ISO 13732-1, as others describe it',
        edition: '2006',
        provenance: 'quoted',
      },
    ],
    hazards: ['hot-surface'],
  },
  'burn-minute': {
    label: 'Burn at a held touch',
    meaning: 'Bare metal from which skin is taken to burn within about a minute.',
    unit: '°C',
    least: 40,
    most: 60,
    careful: 'lower',
    usual: 51,
    published: [
      { text: 'metal held for 1 minute: 51 °C', ...BURNS },
      { text: 'metal held for 10 seconds: about 55 °C', ...BURNS },
    ],
    hazards: ['hot-surface'],
  },
  'shock-volts': {
    label: 'Voltage to be guarded',
    meaning: 'Volts, direct or alternating, from which live parts are guarded and worked on only when dead.',
    unit: 'V',
    least: 1,
    most: 120,
    careful: 'lower',
    usual: 50,
    published: [
      {
        text: 'live parts of 50 V or more are guarded; no difference between direct and alternating',
        source: 'OSHA interpretation letter on 29 CFR 1910.303(g)(2)(i)',
        edition: '4 September 2015',
        provenance: 'checked',
      },
      {
        text: 'live parts below 50 V to ground need not be made dead unless burns or arcs threaten',
        source: '29 CFR 1910.333(a)(1)',
        edition: 'edition not noted',
        provenance: 'quoted',
      },
    ],
    hazards: ['shock'],
  },
  'joint-resistance': {
    label: 'Resistance of a bolted joint',
    meaning: 'Milliohms above which a joint of the heating loop is taken apart before it carries current.',
    unit: 'mΩ',
    least: 0.001,
    most: 5,
    careful: 'lower',
    usual: null,
    published: [
      {
        text: 'a good bolted bar lies at some hundredths of a milliohm',
        source: 'none',
        edition: 'none',
        provenance: 'own',
      },
    ],
    hazards: ['arc'],
  },
  'stroke-reserve': {
    label: 'Reserve of an expansion joint',
    meaning: 'Share of the rated stroke that is to be left at the highest temperature.',
    unit: '%',
    least: 0,
    most: 80,
    careful: 'higher',
    usual: null,
    published: [
      {
        text: 'the maker’s sheet gives the rated stroke; a reserve on it is the site’s choice',
        source: 'none',
        edition: 'none',
        provenance: 'own',
      },
    ],
    hazards: ['expansion'],
  },
  'vent-overpressure': {
    label: 'Over-pressure on venting',
    meaning: 'Most that the relief lets the tube rise above the tunnel.',
    unit: 'bar',
    least: 0.01,
    most: 0.5,
    careful: 'lower',
    usual: 0.1,
    published: [{ text: 'relief at 0.1 bar or below', source: 'none', edition: 'none', provenance: 'own' }],
    hazards: ['vent-pressure'],
  },
  'oxygen-low': {
    label: 'Oxygen too low',
    meaning: 'Volume share below which everybody leaves.',
    unit: '%',
    least: 17,
    most: 20.9,
    careful: 'higher',
    usual: 19.5,
    published: [
      {
        text: 'below 19.5 % an atmosphere counts as oxygen-deficient',
        source: '29 CFR 1910.146(b)',
        edition: 'edition not noted',
        provenance: 'checked',
      },
    ],
    hazards: ['oxygen', 'tube-entry', 'gas-cylinders'],
  },
  'oxygen-high': {
    label: 'Oxygen too high',
    meaning: 'Volume share above which everything burns more readily and everybody leaves.',
    unit: '%',
    least: 21,
    most: 25,
    careful: 'lower',
    usual: 23.5,
    published: [
      {
        text: 'above 23.5 % an atmosphere counts as oxygen-enriched',
        source: '29 CFR 1910.146(b)',
        edition: 'edition not noted',
        provenance: 'checked',
      },
    ],
    hazards: ['oxygen'],
  },
  'oxygen-release': {
    label: 'Oxygen for release',
    meaning: 'Volume share that has to be held before a closed bay is given free.',
    unit: '%',
    least: 19.5,
    most: 20.9,
    careful: 'higher',
    usual: null,
    published: [
      {
        text: 'somewhere between the alarm and plain air (20.9 %), at the site’s choice',
        source: 'none',
        edition: 'none',
        provenance: 'own',
      },
    ],
    hazards: ['oxygen'],
  },
  'combustible-free': {
    label: 'Clear of what burns',
    meaning: 'Distance from the hot tube kept free of cardboard, tape, oil, dust and loose cable.',
    unit: 'm',
    least: 0.1,
    most: 20,
    careful: 'higher',
    usual: 1,
    published: [{ text: '1 m', source: 'none', edition: 'none', provenance: 'own' }],
    hazards: ['fire'],
  },
  'elastomer-limit': {
    label: 'Elastomer seals',
    meaning: 'Hottest that a part with an elastomer seal is allowed to get.',
    unit: '°C',
    least: 60,
    most: 200,
    careful: 'lower',
    usual: 200,
    published: [
      {
        text: 'fluoro-elastomer lasts in service below about 200 °C; above about 300 °C it gives off toxic, corrosive products, hydrogen fluoride among them',
        source: 'handling guides of the plastics trade',
        edition: 'edition not noted',
        provenance: 'quoted',
      },
      {
        text: 'closed gate valve with such a seal: 120 °C',
        source: 'none',
        edition: 'none',
        provenance: 'own',
      },
    ],
    hazards: ['elastomer'],
  },
  'check-in': {
    label: 'Check-in of people alone',
    meaning: 'Minutes between two calls of somebody who is alone; a missed call starts a search.',
    unit: 'min',
    least: 5,
    most: 240,
    careful: 'lower',
    usual: 30,
    published: [{ text: 'every 30 minutes', source: 'none', edition: 'none', provenance: 'own' }],
    hazards: ['lone-work'],
  },
  'implant-field': {
    label: 'Field for people with implants',
    meaning: 'Steady magnetic field above which people with a pacemaker or other implant stay away.',
    unit: 'mT',
    least: 0.05,
    most: 2,
    careful: 'lower',
    usual: 0.5,
    published: [
      {
        text: 'implants are in general not disturbed below 0.5 mT',
        source: 'ICNIRP guidelines on static magnetic fields, Health Physics 96(4)',
        edition: '2009',
        provenance: 'quoted',
      },
    ],
    hazards: ['magnetic-field'],
  },
  'bay-air': {
    label: 'Air of the bay',
    meaning: 'Temperature of the air above which people take turns and drink.',
    unit: '°C',
    least: 20,
    most: 45,
    careful: 'lower',
    usual: null,
    published: [
      {
        text: 'depends on work, clothing and damp; an occupational physician sets it',
        source: 'none',
        edition: 'none',
        provenance: 'own',
      },
    ],
    hazards: ['heat-stress'],
  },
} as const satisfies Record<string, ThresholdFacts>

export type ThresholdKey = keyof typeof FACTS

/** The catalogue by key. */
export const THRESHOLDS: Readonly<Record<ThresholdKey, ThresholdFacts>> = FACTS

export const THRESHOLD_KEYS = Object.keys(FACTS) as ThresholdKey[]

/** Whether a text is the key of a threshold. */
export function isThresholdKey(text: string | undefined): text is ThresholdKey {
  return text !== undefined && Object.hasOwn(FACTS, text)
}

/** What this site says in place of a value that it has not adopted. */
export const NOT_SET = 'not set by site'

/** A threshold as the site has adopted it. */
export interface AdoptedThreshold {
  id: number
  key: ThresholdKey
  value: number
  unit: string
  source: string
  edition: string
  reason: string
  by: string
  at: Date
  /** From this instant on it counts as not set. */
  reviewAt: Date
  endedAt: Date | null
  endedBy: string | null
}

export type ThresholdStanding = 'in-force' | 'lapsed' | 'not-set'

/**
 * How a threshold stands at an instant.
 *
 * @param open the adoption that nobody has ended, or null
 */
export function thresholdStanding(
  open: Pick<AdoptedThreshold, 'endedAt' | 'reviewAt'> | null,
  now: Date,
): ThresholdStanding {
  if (open === null || (open.endedAt !== null && open.endedAt <= now)) return 'not-set'
  return open.reviewAt <= now ? 'lapsed' : 'in-force'
}

/** Whether a value is less careful than the published one; false where nothing has been published. */
export function isLessCareful(key: ThresholdKey, value: number): boolean {
  const { careful, usual } = THRESHOLDS[key]
  if (usual === null) return false
  return careful === 'lower' ? value > usual : value < usual
}
