/** A short stretch of an invented line for tests of conflicts: what a test cares about goes over the rest. */
import type { BakedSegment } from '#app/domain/bake-load.ts'
import type {
  ConflictFacts,
  ConflictPermit,
  Finding,
  OwnPermit,
  Place,
  WorkFact,
} from '#app/domain/permit-conflicts/facts.ts'
import { findConflicts } from '#app/domain/permit-conflicts.ts'

export const ZONE = 'Europe/Vienna'
export const NOW = new Date('2026-11-09T07:00:00Z')

/** A time of the week that begins on Monday 2026-11-16, such as `16 06:00`, at UTC+01:00. */
export function at(text: string): Date {
  return new Date(`2026-11-${text.replace(' ', 'T')}:00+01:00`)
}

const ENDS = [0, 150, 300, 450, 600, 750, 900, 1040, 1200, 1350, 1500, 1650, 1800, 1950, 2100, 2250, 2400]

/** Segment n of sixteen; 17 is the spur that leaves at 1200 m. */
export function place(n: number, state: Place['state'] = 'in-service'): Place {
  if (n === 17) return { tag: 'SP-1', line: 'SPUR', fromM: 0, toM: 90, state }
  return {
    tag: `SG-${String(n).padStart(2, '0')}`,
    line: 'MAIN',
    fromM: ENDS[n - 1] as number,
    toM: ENDS[n] as number,
    state,
  }
}

export const SEGMENTS = Array.from({ length: 17 }, (_, index) => place(index + 1))

/** The steel of a segment: 0.60 m in the west half, 0.50 m in the east half, resistance at 20 °C in ohms. */
export function steel(n: number): BakedSegment {
  const { tag, fromM, toM } = place(n)
  const wide = n <= 8
  return {
    tag,
    startM: fromM,
    endM: toM,
    innerDiameterM: wide ? 0.6 : 0.5,
    wallM: 0.003,
    insulationM: 0.1,
    insulationWPerMK: 0.045,
    resistance20Ohm: (wide ? 0.019 : 0.0228) * ((toM - fromM) / 150),
    bellowsCount: 10,
    bellowsTravelMm: 34,
    bellowsRatedMm: 45,
    blanketW: 6000,
    feeder: wide ? 'west' : 'east',
  }
}

const PEOPLE = { pim: { id: 1, name: 'Pim' }, corwin: { id: 2, name: 'Corwin' } }

/** A permit for these segments of the line, 16 to 25 November unless said otherwise, without heat. */
export function permit(numbers: readonly number[], more: Partial<ConflictPermit> = {}): ConflictPermit {
  return {
    number: 'HSP-T-002',
    state: 'approved',
    segments: numbers.map((n) => place(n)),
    from: at('16 06:00'),
    to: at('25 18:00'),
    maxCelsius: 150,
    exclusionWestM: 10,
    exclusionEastM: 10,
    holder: PEOPLE.corwin,
    supply: null,
    cart: null,
    equipment: [],
    plan: null,
    locks: [],
    heat: null,
    ...more,
  }
}

export function own(numbers: readonly number[], more: Partial<OwnPermit> = {}): OwnPermit {
  return {
    ...permit(numbers, { number: 'HSP-T-001', state: 'requested', holder: PEOPLE.pim }),
    points: [],
    needs: [],
    ...more,
  }
}

export function work(more: Partial<WorkFact> = {}): WorkFact {
  return {
    id: 12,
    kind: 'leak-check',
    title: 'Spray at the joints',
    state: 'planned',
    stretch: { line: 'MAIN', fromM: 750, toM: 900 },
    from: at('17 08:00'),
    to: at('17 12:00'),
    people: 'Fennimore and one more',
    ...more,
  }
}

export function facts(more: Partial<ConflictFacts> = {}): ConflictFacts {
  return {
    now: NOW,
    zone: ZONE,
    ambientC: 18,
    own: own([5]),
    others: [],
    segments: SEGMENTS,
    valves: Array.from({ length: 17 }, (_, n) => ({
      tag: `GV-${String(n).padStart(2, '0')}`,
      west: n === 0 ? null : place(n).tag,
      east: n === 16 ? null : place(n + 1).tag,
      line: 'MAIN',
      atM: ENDS[n] as number,
      limitC: n % 4 === 0 ? 120 : 150,
      partRiseShare: n % 4 === 0 ? 0.7 : 1,
    })),
    joints: [{ spur: 'SPUR', line: 'MAIN', atM: 1200 }],
    works: [],
    limits: {
      exclusionM: 10,
      exclusionC: 60,
      dayKW: 200,
      nightKW: 260,
      baseKW: 18,
      feederKW: { west: 140, east: 160 },
    },
    fans: Array.from({ length: 8 }, (_, n) => ({ tag: `BF-0${n + 1}`, line: 'MAIN', atM: 150 + n * 300 })),
    competences: [],
    holidays: [],
    crews: [],
    ...more,
  }
}

/** Keys of what is found, with effects: `K1:SG-05:HSP-T-002 block`. */
export function found(more: Partial<ConflictFacts>): string[] {
  return findConflicts(facts(more)).map(({ key, effect }) => `${key} ${effect}`)
}

/** The one finding of a rule. */
export function only(more: Partial<ConflictFacts>, rule: Finding['rule']): Finding {
  const ofRule = findConflicts(facts(more)).filter((one) => one.rule === rule)
  const [first] = ofRule
  if (first === undefined || ofRule.length > 1) throw new Error(`${ofRule.length} findings of ${rule}`)
  return first
}
