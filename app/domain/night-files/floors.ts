import type { NumberReader } from './numbers.ts'
import { choice, floorChoice, type QuestionList, question } from './questions.ts'
import type { StuckRun } from './sink.ts'

/** Figures that loggers write at the end of their scale are round: two digits at most. */
const ROUND = /^0*[1-9]?[.,]?0*\d?0*(?:[eEdD][+-]?\d+)?$/

/**
 * Asks about a round figure that is the lowest of its channel and stands in many rows one after the other: it may be
 * the end of the scale instead of a pressure. Until that is said it is kept as it stands.
 */
export function askFloors(runs: readonly StuckRun[], numbers: NumberReader, questions: QuestionList): void {
  for (const { channel, text, count, line, lowest } of runs) {
    const value = numbers.read(text)
    if (!lowest || !ROUND.test(text) || Number.isNaN(value)) continue
    const id = `floor:${channel}`
    if (questions.answer(id) !== null) continue
    questions.ask(
      id,
      () =>
        question({
          id,
          kind: 'floor',
          blocking: false,
          line,
          text: `${channel} shows ${text} in ${count} rows, and nothing lower. Is that a measured value, or the end of the scale? Until it is said it counts as measured.`,
          found: `“${text}” in ${count} rows one after the other`,
          expected: 'figures that move a little from row to row',
          mend: 'Look up the lowest figure of the gauge in its manual.',
          choices: [
            choice('measured', 'a measured value'),
            choice(floorChoice(value), `the end of the scale: ${text} means under range`),
          ],
        }),
      count,
    )
  }
}
