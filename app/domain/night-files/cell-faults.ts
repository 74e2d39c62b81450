import { QUALITIES } from '../readings.ts'
import type { CellFault } from './cells.ts'
import type { ChannelBook } from './channel-names.ts'
import { choice, question } from './questions.ts'
import type { Fault } from './tally.ts'
import { plainWord } from './text.ts'
import type { Question } from './types.ts'

/** What to say about a cell that is no reading. */
export function cellFault(
  fault: CellFault,
  text: string,
  unitToken: string,
  column: number,
  decimalMark: string,
): Fault {
  const found = `“${text.trim().slice(0, 60)}”`
  const example = decimalMark === ',' ? '5,1E-10' : '5.1E-10'
  switch (fault) {
    case 'unknown-word':
      return {
        code: fault,
        column,
        found,
        expected: `a number such as ${example}, or a word of the gauge that is known here`,
        mend: 'Answer what the word means, or have an engineer add it to the profile of the source.',
      }
    case 'unknown-unit':
      return {
        code: fault,
        column,
        found: `${found} with the unit “${unitToken}”`,
        expected: 'a unit that is known and fits what the channel measures',
        mend: 'Correct the unit at the logger, or leave the reading out.',
      }
    case 'no-unit':
      return {
        code: fault,
        column,
        found: `${found} without a unit`,
        expected: 'a unit in the header, in a line above, or in the row',
        mend: 'Add the unit of this column to the profile of the source.',
      }
    case 'unreadable-value':
      return {
        code: fault,
        column,
        found,
        expected: `a whole number such as ${example}`,
        mend: 'If the number was cut or mistyped, leave it out; type the reading by hand if somebody has it on paper.',
      }
  }
}

/** Asks what a word in a value or status cell means. Until then its readings stay out. */
export function wordQuestion(text: string, line: number, column: number): Question {
  const word = plainWord(text)
  return question({
    id: `unknown-word:${word}`,
    kind: 'unknown-word',
    blocking: false,
    line,
    column,
    text: `What does “${text.trim().slice(0, 60)}” mean? Readings with it are left out until that is known.`,
    found: `“${text.trim().slice(0, 60)}”`,
    expected: 'a number, or one of the words that gauges of this source are known to write',
    mend: 'Choose the meaning that the manual of the logger gives.',
    choices: [
      ...QUALITIES.filter(
        (quality) => quality !== 'withdrawn' && quality !== 'manual' && quality !== 'good',
      ).map((quality) => choice(quality, quality)),
      choice('ok', 'nothing is wrong: the number beside it counts'),
      choice('on', 'switched on'),
    ],
  })
}

/** Asks where readings under an unknown name go. Until then they stay out. */
export function channelQuestion(name: string, line: number, column: number, book: ChannelBook): Question {
  const match = book.match(name)
  const several = match.kind === 'several' ? match.names : null
  return question({
    id: `unknown-channel:${name}`,
    kind: 'unknown-channel',
    blocking: false,
    line,
    column,
    text: `The register has no channel “${name}” for this source. Its readings are left out until somebody says where they belong.`,
    found: `“${name}”`,
    expected: several === null ? 'a channel of this source in the register' : `one of ${several.join(', ')}`,
    mend: 'Choose the channel, leave it out of this file, or add it in the register and read the file again.',
    choices: [
      choice('leave-out', 'leave it out of this file'),
      ...(several ?? book.names()).map((known) => choice(known, known)),
    ],
  })
}
