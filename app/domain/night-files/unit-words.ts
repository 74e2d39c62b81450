import { powerText } from '../power-text.ts'
import { QUANTITIES, type Quantity } from '../readings.ts'
import type { NumberReader } from './numbers.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { detach } from './text.ts'
import type { Candidate, Question, ReadContext } from './types.ts'
import { toSi, type Unit, unitOf, unitsOf } from './units.ts'

/** Cells in which one unknown unit has to stand before it is asked about instead of only rejected. */
const COLUMN_OF_CELLS = 3
const PREFIX = 'unit-word:'

/** A cell to show beside the units that it may be in. */
export interface UnitSample {
  line: number
  text: string
  /** Number in the cell as written. */
  number: number
  channel: string
}

/** Values of cells under a unit, beside what the same channels showed last. */
export function unitCandidates(
  samples: readonly UnitSample[],
  unit: Unit,
  context: ReadContext,
): Candidate[] {
  const si = (value: number) => `${powerText(value)} ${QUANTITIES[unit.quantity].unit}`
  return samples.map(({ line, text, number, channel }) => {
    const last = context.lastKnown?.[channel]
    const beside = last === undefined ? '' : `; ${channel} was last ${si(last.value)}`
    return { line, text, meaning: `${si(toSi(number, unit))}${beside}` }
  })
}

/** The first three cells of a column that hold numbers. */
export function unitSamples(
  rows: readonly { fields: string[]; line: number }[],
  at: number,
  channelOf: (fields: readonly string[]) => string,
  numbers: NumberReader,
): UnitSample[] {
  const samples: UnitSample[] = []
  for (const { fields, line } of rows) {
    const text = (fields[at] ?? '').trim()
    const number = numbers.read(text)
    if (Number.isFinite(number)) samples.push({ line, text, number, channel: channelOf(fields) })
    if (samples.length === 3) break
  }
  return samples
}

/** Units whose name nobody knows or that name no absolute pressure: what a person or the profile said they mean. */
export class UnitWords {
  readonly #questions: QuestionList
  readonly #fromProfile: Readonly<Record<string, string>>
  readonly #context: ReadContext
  readonly #seen = new Map<string, number>()

  constructor(questions: QuestionList, fromProfile: Readonly<Record<string, string>>, context: ReadContext) {
    this.#questions = questions
    this.#fromProfile = fromProfile
    this.#context = context
  }

  /** What a token stands for: a unit, nothing of use, or null while nobody has said. */
  meaning(token: string): Unit | 'leave-out' | null {
    const said = this.#questions.answer(`${PREFIX}${token}`) ?? this.#own(token)
    if (said === 'leave-out') return said
    return unitOf(said)
  }

  #own(token: string): string | null {
    return Object.hasOwn(this.#fromProfile, token) ? (this.#fromProfile[token] ?? null) : null
  }

  /** Asks what a unit in a header or line of metadata means; nothing can be taken in before that is said. */
  ask(
    token: string,
    quantity: Quantity,
    place: { line: number; column: number },
    samples: readonly UnitSample[],
  ): void {
    this.#questions.ask(`${PREFIX}${token}`, () => this.#question(token, quantity, place, samples, true))
  }

  /** Counts a cell or row whose unit nobody knows; from the third on it is asked about. */
  meet(token: string, quantity: Quantity, place: { line: number; column: number }, sample: UnitSample): void {
    const times = (this.#seen.get(token) ?? 0) + 1
    if (this.#seen.size < 1000 || this.#seen.has(token))
      this.#seen.set(times === 1 ? detach(token) : token, times)
    if (times < COLUMN_OF_CELLS) return
    this.#questions.ask(
      `${PREFIX}${token}`,
      () => this.#question(token, quantity, place, [sample], false),
      times === COLUMN_OF_CELLS ? COLUMN_OF_CELLS : 1,
    )
  }

  #question(
    token: string,
    quantity: Quantity,
    { line, column }: { line: number; column: number },
    samples: readonly UnitSample[],
    blocking: boolean,
  ): Question {
    return question({
      id: `${PREFIX}${token}`,
      kind: 'unit',
      blocking,
      line,
      column,
      text: `“${token}” is no unit that can be taken for granted here. In which unit are these values?`,
      found: `the unit “${token}”`,
      expected: 'a unit of the absolute quantity, such as mbar, Pa or Torr for pressures',
      mend: 'Compare the values with what the gauges showed last and choose; correct the unit at the logger.',
      choices: [
        ...unitsOf(quantity).map((unit) =>
          choice(unit.token, unit.token, unitCandidates(samples, unit, this.#context)),
        ),
        choice('leave-out', 'leave these values out'),
      ],
    })
  }
}
