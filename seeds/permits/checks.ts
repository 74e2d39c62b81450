/** Tests and rounds at the segments of the demo's permits. */
import type { permitRound, permitTest } from '../../app/db/schema/index.ts'
import type { RequiredTest } from '../../app/domain/permit-content.ts'
import type { PermitTestKind } from '../../app/domain/permit-words.ts'
import { at } from '../demo-time.ts'
import { hoursAfter } from '../log/entry.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'
import { pick, scatter } from '../readings/noise.ts'
import type { DemoPermit } from '../scenario/permits.ts'
import { LOCKS_MOVED, type PermitHistory } from './acts.ts'
import { peopleOf } from './crews.ts'
import { type Job, jobOf } from './jobs.ts'
import { requiredTests } from './points.ts'

type TestRow = typeof permitTest.$inferInsert
type RoundRow = typeof permitRound.$inferInsert

const minutesAfter = (when: Date, minutes: number) => hoursAfter(when, minutes / 60)

interface Instrument {
  serial: string
  due: Date | null
}

/** Instruments that the register lists as equipment, by what they are used for. */
const INSTRUMENTS: Partial<Record<PermitTestKind, Instrument>> = {
  'zero-voltage': { serial: 'VT-1', due: at('2027-03-01') },
  'earth-continuity': { serial: 'IT-1', due: at('2027-03-01') },
  'insulation-resistance': { serial: 'IT-1', due: at('2027-03-01') },
  'joint-resistance': { serial: 'RM-1', due: at('2027-04-15') },
  'cut-out': { serial: 'CP-1', due: at('2027-01-20') },
}

function instrumentFor(kind: PermitTestKind, permit: DemoPermit): Instrument {
  if (kind !== 'oxygen') return INSTRUMENTS[kind] ?? { serial: '', due: null }
  const number = pick([1, 2, 3, 4, 6, 7, 8], permit.number)
  return {
    serial: `OXP-${String(number).padStart(2, '0')}`,
    due: at(number <= 5 ? '2026-12-15' : '2027-03-15'),
  }
}

/** What an instrument showed, with its usual digits; null where nothing is measured. */
function shownBy(test: RequiredTest, when: Date, key: string): number | null {
  const noise = scatter(key, when.getTime())
  const round = (value: number, digits: number) => Number(value.toFixed(digits))
  switch (test.kind) {
    case 'oxygen':
      return round(20.8 + 0.05 * noise, 1)
    case 'zero-voltage':
      return 0
    case 'earth-continuity':
      return round(0.031 + 0.004 * noise, 3)
    case 'insulation-resistance':
      return round(85 + 9 * noise, 0)
    case 'joint-resistance':
      return round(0.024 + 0.003 * noise, 3)
    case 'cut-out':
      return round((test.low ?? 0) + 4.5 + 0.8 * noise, 0)
    default:
      return null
  }
}

const NOTES: Partial<Record<PermitTestKind, string>> = {
  'emergency-stop': 'Both buttons pressed, the breaker fell each time',
  communications: 'Heard and answered from both barriers',
  'earth-fault-monitor': 'Tripped by its test resistor',
  'cut-out': 'Sensor warmed with the heat gun until it opened',
}

/** Tests before acceptance, again after a stop, and those that fall due again before each renewal. */
export function testRows(permit: DemoPermit, permitId: number, history: PermitHistory): TestRow[] {
  const job = jobOf(permit)
  const { acceptedAt, renewals } = history
  if (job === null || acceptedAt === null) return []
  const { holder, mate } = peopleOf(permit)
  const required = requiredTests(job)
  const rows: TestRow[] = []
  const take = (test: RequiredTest, when: Date, tester: PersonKey) => {
    const { serial, due } = instrumentFor(test.kind, permit)
    rows.push({
      permitId,
      kind: test.kind,
      place: test.place,
      value: shownBy(test, when, `${permit.number}/${test.kind}`),
      unit: test.unit,
      passed: true,
      instrumentSerial: serial,
      calibrationDue: due,
      testerId: PERSON_ID[tester],
      takenAt: when,
      recordedBy: PERSON_ID[tester],
      recordedAt: minutesAfter(when, 1),
      nextDueAt: test.everyHours === null ? null : hoursAfter(when, test.everyHours),
      note: NOTES[test.kind] ?? '',
    })
  }
  for (const [index, test] of required.entries()) take(test, minutesAfter(acceptedAt, -20 + index), mate)
  const repeated = required.filter(({ everyHours }) => everyHours !== null)
  for (const { at: when, by } of renewals) {
    for (const [index, test] of repeated.entries()) take(test, minutesAfter(when, -9 + index), by)
  }
  const stops = [
    ...permit.suspensions.map(({ untilAt }) => untilAt),
    ...(permit.points === undefined ? [] : [LOCKS_MOVED.until]),
  ]
  for (const untilAt of stops) {
    for (const [index, test] of required.entries()) take(test, minutesAfter(untilAt, -13 + index), holder)
  }
  return rows.sort((a, b) => a.takenAt.getTime() - b.takenAt.getTime())
}

/** Hottest surface that a hand can reach, for a time of the bake, and where. */
function hottest({ kind, celsius, bake, fromM, toM }: Job, when: Date, key: string) {
  const warm =
    kind === 'bake' && bake !== null && (when < bake.rampAt || (bake.coldAt !== null && when > bake.coldAt))
  const outside = warm ? 24 : 18 + (celsius - 18) * (kind === 'blanket' ? 0.22 : 0.27)
  const places = [fromM + 3, fromM + (toM - fromM) * 0.31, (fromM + toM) / 2, toM - 5]
  return {
    hottestC: Math.round(outside + 1.5 * scatter(key, when.getTime())),
    hottestAtM: Number(Math.max(fromM, pick(places, `${key}/${when.toISOString()}`)).toFixed(0)),
  }
}

/** A round before each renewal, one at noon of a day's work, and those of the demo's morning. */
export function roundRows(permit: DemoPermit, permitId: number, history: PermitHistory): RoundRow[] {
  const job = jobOf(permit)
  const { acceptedAt, renewals } = history
  if (job === null || acceptedAt === null) return []
  const { mate } = peopleOf(permit)
  const rounds = renewals.length > 0 ? renewals : [{ at: hoursAfter(acceptedAt, 4), by: mate }]
  const rows = rounds.map(
    ({ at: when, by }): RoundRow => ({
      permitId,
      at: minutesAfter(when, -18),
      recordedAt: minutesAfter(when, -12),
      personId: PERSON_ID[by],
      ...hottest(job, when, permit.number),
      inOrder: true,
      text: 'Barriers, lamps and signs as placed; covers on.',
    }),
  )
  return [
    ...rows,
    ...MORNING.filter(({ number }) => number === permit.number).map((one) => morning(one, permitId)),
  ]
}

interface MorningRound {
  number: string
  when: string
  written: string
  by: PersonKey
  hottestC: number
  atM: number
  inOrder: boolean
  text: string
}

/** The same rounds stand in the log. */
const MORNING: readonly MorningRound[] = [
  {
    number: 'HSP-2026-030',
    when: '2026-11-09 07:30',
    written: '2026-11-09 07:36',
    by: 'odalys',
    hottestC: 74,
    atM: 1195,
    inOrder: true,
    text: 'Flange by contact probe. Barriers stay until it is below 40 °C.',
  },
  {
    number: 'HSP-2026-031',
    when: '2026-11-09 06:55',
    written: '2026-11-09 07:08',
    by: 'pim',
    hottestC: 61,
    atM: 706,
    inOrder: false,
    text: 'Insulation seems to have slipped near 706 m, TH-05-09 reads low. Not touched; barriers and covers as placed.',
  },
]

function morning(
  { when, written, by, hottestC, atM, inOrder, text }: MorningRound,
  permitId: number,
): RoundRow {
  return {
    permitId,
    at: at(when),
    recordedAt: at(written),
    personId: PERSON_ID[by],
    hottestC,
    hottestAtM: atM,
    inOrder,
    text,
  }
}
