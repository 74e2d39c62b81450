import { QUANTITIES, type Quantity } from '../readings.ts'
import type { ChannelBook } from './channel-names.ts'
import { choice, type QuestionList, question } from './questions.ts'
import type { Refusal } from './types.ts'
import { type Unit, unitsOf } from './units.ts'

/** Which of several columns of one name counts, by its position from 1; null while that is open, and for none. */
export function oneOf(name: string, positions: readonly number[], questions: QuestionList): number | null {
  const answer = questions.answer(`same-name:${name}`)
  return positions.find((position) => String(position) === answer) ?? null
}

/** Asks which of several columns of one name counts, unless that has been answered. */
export function askOneOf(
  name: string,
  positions: readonly number[],
  line: number,
  questions: QuestionList,
): void {
  const id = `same-name:${name}`
  if (questions.answer(id) !== null) return
  questions.ask(id, () =>
    question({
      id,
      kind: 'same-name',
      blocking: false,
      line,
      column: positions[1] ?? null,
      text: `Columns ${positions.join(' and ')} are all called “${name}”. All of them are left out until it is said which one is the channel.`,
      found: `“${name}” ${positions.length} times`,
      expected: 'a name of its own for every column',
      mend: 'Choose by the values that the gauge showed last, and correct the name at the logger.',
      choices: [
        ...positions.map((position) => choice(String(position), `column ${position}`)),
        choice('leave-out', 'leave all of them out'),
      ],
    }),
  )
}

/** Asks about a column whose unit does not measure what its channel measures. */
export function askUnfitUnit(
  name: string,
  { line, column }: { line: number; column: number },
  unit: Unit,
  quantity: Quantity,
  questions: QuestionList,
): void {
  const id = `unfit-unit:${name}`
  if (questions.answer(id) === 'leave-out') return
  const measured = QUANTITIES[quantity].label.toLowerCase()
  questions.ask(id, () =>
    question({
      id,
      kind: 'unit',
      blocking: false,
      line,
      column,
      text: `“${name}” is written in ${unit.token}, and its channel measures ${measured}. The column is left out: how one follows from the other is not known here.`,
      found: `the unit “${unit.token}”`,
      expected: `a unit of ${measured} such as ${unitsOf(quantity)[0]?.token ?? 'none'}`,
      mend: 'Let the logger write the converted value, or have an engineer register a channel that measures what is written.',
      choices: [choice('leave-out', 'leave the column out')],
    }),
  )
}

/** Refuses a file in which no channel of the source stands. */
export function noKnownChannel(name: string, line: number, column: number, book: ChannelBook): Refusal {
  const names = book.names()
  return {
    code: 'no-known-channel',
    line,
    column,
    found: name === '' ? 'no column with a channel' : `“${name}” and no other channel of this source`,
    expected:
      names.length === 0
        ? 'channels of this source, but the register has none'
        : `channels such as ${names.slice(0, 4).join(', ')}`,
    mend: 'Check that the right source was chosen. New channels are added in the register first.',
  }
}
