/**
 * Tests of a permit: what a permit asks for, what was found, and whether that counts. Pure.
 *
 * A result counts when it was taken with an instrument whose calibration was in date and lies within the limits that
 * the permit sets, ends included.
 */
import { PUBLISHED_OXYGEN } from './oxygen.ts'
import type { RequiredTest } from './permit-content.ts'
import type { TestFact } from './permit-facts.ts'
import {
  PERMIT_STATE_LABELS,
  PERMIT_TEST_LABELS,
  type PermitState,
  type PermitTestKind,
} from './permit-words.ts'

const HOUR_MS = 3_600_000

/** Tests whose result is a figure of an instrument; the others are tried and found to work or not. */
const MEASURED: readonly PermitTestKind[] = [
  'oxygen',
  'flammable-gas',
  'zero-voltage',
  'earth-continuity',
  'insulation-resistance',
  'joint-resistance',
  'surface-temperature',
]

/** Whether a test of this kind is taken with an instrument. */
export function needsInstrument(kind: PermitTestKind): boolean {
  return MEASURED.includes(kind)
}

const ELECTRICAL = ['voltage', 'current', 'resistance']
/** What an instrument has to read, as the register calls it, to be the right one for a test. A hand meter reads several. */
const QUANTITIES: Partial<Record<PermitTestKind, readonly string[]>> = {
  oxygen: ['oxygen'],
  'zero-voltage': ELECTRICAL,
  'earth-continuity': ELECTRICAL,
  'insulation-resistance': ELECTRICAL,
  'joint-resistance': ELECTRICAL,
  'surface-temperature': ['temperature', ...ELECTRICAL],
}

/** Whether an instrument that reads a quantity can have been used for a test. */
export function measures(kind: PermitTestKind, quantity: string): boolean {
  return QUANTITIES[kind]?.includes(quantity) ?? true
}

/** Units in which each kind is usually given, the first one proposed. */
export const TEST_UNITS: Record<PermitTestKind, string> = {
  oxygen: '%',
  'flammable-gas': '% LEL',
  'zero-voltage': 'V',
  'earth-continuity': 'Ω',
  'insulation-resistance': 'MΩ',
  'joint-resistance': 'µΩ',
  'cut-out': '°C',
  'emergency-stop': '',
  communications: '',
  'earth-fault-monitor': 'mA',
  'surface-temperature': '°C',
}

/** One test as it was taken. */
export interface TakenTest {
  id: number
  kind: PermitTestKind
  place: string
  value: number | null
  unit: string
  passed: boolean
  takenAt: Date
  note: string
}

/** States in which tests are written down: from the request until the end, whatever the result. */
function testsTaken(state: PermitState): boolean {
  return ['requested', 'approved', 'issued', 'suspended', 'expired', 'handed-back'].includes(state)
}

/** Whether a test answers what a permit asks for: its kind at its place. */
export function answers(
  required: Pick<RequiredTest, 'kind' | 'place'>,
  taken: Pick<TakenTest, 'kind' | 'place'>,
): boolean {
  const plain = (text: string) => text.trim().toLowerCase().replaceAll(/\s+/g, ' ')
  return required.kind === taken.kind && plain(required.place) === plain(taken.place)
}

/** Limits in words: `19.5 to 23.5 %`, `at most 1 V`; empty where there are none. */
export function limitsText({ low, high, unit }: Pick<RequiredTest, 'low' | 'high' | 'unit'>): string {
  const shown = unit === '' ? '' : ` ${unit}`
  if (low !== null && high !== null) return `${low} to ${high}${shown}`
  if (low !== null) return `at least ${low}${shown}`
  return high === null ? '' : `at most ${high}${shown}`
}

/** A figure as it is shown. */
export function figureText(value: number | null, unit: string): string {
  if (value === null) return 'no figure'
  return unit === '' ? String(value) : `${value} ${unit}`
}

export interface JudgedTest {
  kind: PermitTestKind
  value: number | null
  unit: string
  takenAt: Date
  /** First instant at which the instrument's calibration no longer holds; null where nobody knows. */
  calibrationDue: Date | null
  /** What the tester says, where the permit sets no limits that decide it. */
  saysPassed: boolean | null
}

/**
 * Whether a test passes, with every reason why not; `doubt` is what speaks against the instrument alone.
 *
 * @param required what the permit asks for; null for a test beyond that
 * @param when writes an instant in site time
 */
export function judgeTest(
  required: Pick<RequiredTest, 'low' | 'high' | 'unit'> | null,
  test: JudgedTest,
  when: (at: Date) => string,
): { passed: boolean; reasons: string[]; doubt: string } {
  const reasons: string[] = []
  const { kind, value, unit, takenAt, calibrationDue } = test
  if (needsInstrument(kind)) {
    if (calibrationDue === null) {
      reasons.push('Nobody knows until when the instrument is calibrated.')
    } else if (calibrationDue <= takenAt) {
      reasons.push(`The instrument’s calibration ran out ${when(calibrationDue)}, before the test.`)
    }
  }
  const doubt = reasons.join(' ')
  const limits = limitsOf(kind, required)
  const outside = limits === null ? null : outsideText(limits, value, unit)
  if (outside !== null) reasons.push(outside)
  if (test.saysPassed === false) reasons.push('The tester says it failed.')
  if (limits === null && test.saysPassed === null) reasons.push('Nobody has said whether it passed.')
  return { passed: reasons.length === 0, reasons, doubt }
}

type Limits = Pick<RequiredTest, 'low' | 'high' | 'unit'>

/** The limits that decide a test; null where the tester's word does. Oxygen never passes without any. */
export function limitsOf(kind: PermitTestKind, required: Limits | null): Limits | null {
  if (required !== null && (required.low !== null || required.high !== null)) return required
  return kind === 'oxygen' ? { ...PUBLISHED_OXYGEN, unit: '%' } : null
}

/** Why a figure is not within limits; null when it is. */
export function outsideText(limits: Limits, value: number | null, unit: string): string | null {
  if (value === null) return `There is no figure; wanted: ${limitsText(limits)}.`
  if (unit !== limits.unit) {
    return `Found a figure in ${unit === '' ? 'no unit' : unit}; wanted: ${limitsText(limits)}.`
  }
  const inside =
    (limits.low === null || value >= limits.low) && (limits.high === null || value <= limits.high)
  return inside ? null : `Found ${figureText(value, unit)}; wanted: ${limitsText(limits)}.`
}

/** When a test is due again; null for once before the permit is accepted. */
export function nextDue(required: Pick<RequiredTest, 'everyHours'> | null, takenAt: Date): Date | null {
  const hours = required?.everyHours ?? null
  return hours === null ? null : new Date(takenAt.getTime() + hours * HOUR_MS)
}

/**
 * What the permit's rules are told of each test it asks for. The last result counts, also when an earlier one was
 * better; limits that have been changed since are those of now. At the very second it falls due a test is overdue.
 */
export function testFacts(
  required: readonly RequiredTest[],
  taken: readonly TakenTest[],
  now: Date,
  when: (at: Date) => string,
): TestFact[] {
  return required.map((asked) => {
    const { kind, place } = asked
    const name = `${PERMIT_TEST_LABELS[kind]}${place === '' ? '' : `, ${place}`}`
    const last = taken
      .filter((test) => answers(asked, test) && test.takenAt <= now)
      .toSorted(byTime)
      .at(-1)
    if (last === undefined) {
      return {
        kind,
        place,
        state: 'missing',
        takenAt: null,
        nextDueAt: null,
        text: `${name}: not tested yet`,
      }
    }
    const limits = limitsOf(kind, asked)
    const outside = limits === null ? null : outsideText(limits, last.value, last.unit)
    const found = `${last.value === null ? '' : `${figureText(last.value, last.unit)}, `}${when(last.takenAt)}`
    const nextDueAt = nextDue(asked, last.takenAt)
    const { takenAt } = last
    if (!last.passed || outside !== null) {
      const why = outside === null ? last.note : outside
      return {
        kind,
        place,
        state: 'failed',
        takenAt,
        nextDueAt,
        text: `${name}: failed (${found})${why === '' ? '' : `. ${why}`}`,
      }
    }
    const overdue = nextDueAt !== null && nextDueAt <= now
    const due = nextDueAt === null ? '' : `, ${overdue ? 'was due again' : 'next due'} ${when(nextDueAt)}`
    return {
      kind,
      place,
      state: overdue ? 'overdue' : 'good',
      takenAt,
      nextDueAt,
      text: `${name}: ${overdue ? 'overdue' : 'good'} (${found})${due}`,
    }
  })
}

function byTime(a: TakenTest, b: TakenTest): number {
  return a.takenAt.getTime() - b.takenAt.getTime() || a.id - b.id
}

/** Why nothing is written down at a permit in this state; null where it is. */
export function notTakenText(number: string, state: PermitState): string | null {
  if (testsTaken(state)) return null
  return `${number} is ${PERMIT_STATE_LABELS[state].toLowerCase()}. Tests, rounds and photos belong to it from its request until its end.`
}

/**
 * Why a round cannot be said to have been in order: something was hotter than the permit allows.
 *
 * @param hottestC hottest surface found, °C
 */
export function roundObjection(
  round: { inOrder: boolean; hottestC: number | null; text: string },
  maxCelsius: number | null,
): string | null {
  if (!round.inOrder) {
    return round.text.trim().length < 5 ? 'Say in a few words what was not in order.' : null
  }
  if (round.hottestC === null || maxCelsius === null || round.hottestC <= maxCelsius) return null
  return `${round.hottestC} °C is above the ${maxCelsius} °C that this permit allows, so it was not in order. Choose “not in order”, say what was done, and suspend the permit if it goes on.`
}
