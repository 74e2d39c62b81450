import { choice, type QuestionList, question } from './questions.ts'
import { answeredInstant, instantChoice, startProposals } from './start-time.ts'
import type { Fault } from './tally.ts'
import type { Question, ReadContext } from './types.ts'
import type { ZoneClock } from './zones.ts'

/** A step back by more than this inside a stretch without a clock means that the logger started once more. */
const STEP_BACK_MS = 5000

interface Stretch {
  line: number
  firstMs: number
  lastMs: number
  /** What to add to a time of the stretch; null while nobody has said. */
  shiftMs: number | null
  question: Question | null
}

/**
 * Stretches of rows whose logger had lost its clock and counts from some year long ago. Their spans are right, their
 * times are not: each stretch waits for somebody to say when its first row was written.
 */
export class ResetStretches {
  readonly #questions: QuestionList
  readonly #context: ReadContext
  readonly #zone: ZoneClock
  readonly #periodMs: number | null
  #open: Stretch | null = null

  constructor(questions: QuestionList, context: ReadContext, zone: ZoneClock, periodMs: number | null) {
    this.#questions = questions
    this.#context = context
    this.#zone = zone
    this.#periodMs = periodMs
  }

  /** Instant of a row of such a stretch, or null while it is left out. `beforeMs`: the last sound instant above. */
  read(atMs: number, line: number, text: string, beforeMs: number | null): number | null {
    if (this.#open === null || atMs < this.#open.lastMs - STEP_BACK_MS)
      this.#open = this.#begin(atMs, line, text, beforeMs)
    const stretch = this.#open
    stretch.lastMs = Math.max(stretch.lastMs, atMs)
    if (stretch.question !== null) stretch.question.waiting += 1
    return stretch.shiftMs === null ? null : atMs + stretch.shiftMs
  }

  /** A row with a sound time ends the stretch, and gives one more proposal for it. */
  close(nextMs: number): void {
    const stretch = this.#open
    if (stretch === null) return
    this.#open = null
    if (stretch.question === null) return
    const { choices } = stretch.question
    const firstMs = nextMs - (this.#periodMs ?? 0) - (stretch.lastMs - stretch.firstMs)
    const proposal = instantChoice(firstMs, this.#zone, 'the stretch runs on into the row after it')
    if (!choices.some(({ value }) => value === proposal.value)) choices.splice(-1, 0, proposal)
  }

  #begin(atMs: number, line: number, text: string, beforeMs: number | null): Stretch {
    const id = `clock-reset:${line}`
    const answer = this.#questions.answer(id)
    const answered = answer === null ? Number.NaN : answeredInstant(answer, this.#zone)
    const stretch: Stretch = {
      line,
      firstMs: atMs,
      lastMs: atMs,
      shiftMs: Number.isNaN(answered) ? null : answered - atMs,
      question: null,
    }
    if (answer !== null) return stretch
    const choices = startProposals(this.#context, this.#zone)
    if (beforeMs !== null)
      choices.unshift(
        instantChoice(
          beforeMs + (this.#periodMs ?? 0),
          this.#zone,
          'the stretch runs on from the row before it',
        ),
      )
    const asked = question({
      id,
      kind: 'start',
      blocking: false,
      line,
      column: null,
      text: 'From this line on the logger had lost its clock. When was this line written? Until that is known its rows are left out.',
      found: `“${text.trim().slice(0, 60)}”, the time a logger falls back to`,
      expected: 'the true time of the line, from the logbook, another source or a neighbouring file',
      mend: 'Choose or give the time; the rows keep their spacing and are marked as reconstructed in time.',
      choices: [...choices, choice('leave-out', 'leave these rows out')],
      typed: 'time',
    })
    this.#questions.ask(id, () => asked, 0)
    stretch.question = asked
    return stretch
  }
}

/** Why a row of such a stretch is left out. */
export function resetFault(text: string, column: number): Fault {
  return {
    code: 'clock-reset',
    column,
    found: `“${text.trim().slice(0, 60)}”, the time a logger falls back to when its clock has lost its setting`,
    expected: 'a time after the year 2010',
    mend: 'Answer when the first of these lines was written, and set the clock of the logger.',
  }
}
