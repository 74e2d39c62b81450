import { MARKS } from '../readings.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { detach } from './text.ts'

/** A clock that is set by the network steps back by no more than this; the order of rows counts then. */
const SMALL_STEP_MS = 5000
/** So many rows before the clock has caught up with itself make a jump; fewer are rows out of order. */
const JUMP_ROWS = 3
/** More jumps than these in one file are rows of several files put together. */
const MAX_JUMPS = 3
const HOUR_MS = 3_600_000
const MAX_TRACKS = 10_000

interface Jump {
  line: number
  fromMs: number
  toMs: number
  rowsBelow: number
}

interface Track {
  lastMs: number
  topMs: number
  jump: Jump | null
}

/** Watches the order of the times of each track: of the rows of a wide file, of every channel of a long one. */
export class ClockWatch {
  /** Steps back from one row to the next. */
  backSteps = 0
  readonly #tracks = new Map<string, Track>()
  readonly #jumps: Jump[] = []
  readonly #questions: QuestionList
  /** Stretches of lines whose times a person doubts. */
  readonly #doubted: { from: number; to: number }[]

  constructor(questions: QuestionList) {
    this.#questions = questions
    const answered = ['clock-jump:', 'half-day:'].flatMap((prefix) => questions.answersTo(prefix))
    this.#doubted = answered.flatMap(({ rest, choice: chosen }) => {
      const line = Number(rest)
      if (chosen === 'doubt-before') return [{ from: 0, to: line - 1 }]
      return chosen === 'doubt-after' ? [{ from: line, to: Number.POSITIVE_INFINITY }] : []
    })
  }

  /** Marks that the time of a row earns by its place among the others. */
  see(trackName: string, atMs: number, line: number): number {
    let marks = 0
    for (const { from, to } of this.#doubted) if (line >= from && line <= to) marks |= MARKS['time-ambiguous']
    const track = this.#tracks.get(trackName)
    if (track === undefined) {
      // Garbage in the column of names must not fill the memory; its rows are turned away later.
      if (this.#tracks.size < MAX_TRACKS)
        this.#tracks.set(detach(trackName), { lastMs: atMs, topMs: atMs, jump: null })
      return marks
    }
    const step = atMs - track.lastMs
    if (step < 0) {
      this.backSteps += 1
      if (step >= -SMALL_STEP_MS) marks |= MARKS['order-kept']
      else if (track.jump === null) track.jump = this.#begin(line, track.lastMs, atMs)
    }
    track.lastMs = atMs
    if (atMs >= track.topMs) {
      track.topMs = atMs
      track.jump = null
    } else if (track.jump !== null) track.jump.rowsBelow += 1
    return marks
  }

  #begin(line: number, fromMs: number, toMs: number): Jump {
    const jump = { line, fromMs, toMs, rowsBelow: 0 }
    // A file with thousands of rows out of order keeps only what the questions need.
    if (this.#jumps.length > MAX_JUMPS) {
      const stray = this.#jumps.findIndex(({ rowsBelow }) => rowsBelow < JUMP_ROWS)
      if (stray !== -1) this.#jumps.splice(stray, 1)
    }
    if (this.#jumps.length <= MAX_JUMPS) this.#jumps.push(jump)
    return jump
  }

  /** Asks about the jumps. `halfDays`: no time of the file passed noon or named its half of the day. */
  end(halfDays: boolean): void {
    // Tracks of one file that jump at the same place are one jump.
    const lines = new Set<number>()
    const jumps = this.#jumps.filter(({ rowsBelow, fromMs, toMs, line }) => {
      const known = Array.from(lines).some((other) => Math.abs(other - line) <= this.#tracks.size)
      if (rowsBelow < JUMP_ROWS || known || fromMs === toMs) return false
      lines.add(line)
      return true
    })
    if (jumps.length > MAX_JUMPS) return
    for (const jump of jumps) {
      const back = jump.fromMs - jump.toMs
      this.#ask(jump, halfDays && back >= 10.5 * HOUR_MS && back < 12 * HOUR_MS)
    }
  }

  #ask({ line, fromMs, toMs, rowsBelow }: Jump, atNoon: boolean): void {
    const id = `${atNoon ? 'half-day' : 'clock-jump'}:${line}`
    if (this.#questions.answer(id) !== null) return
    const minutes = Math.round((fromMs - toMs) / 60_000)
    this.#questions.ask(
      id,
      () =>
        question({
          id,
          kind: 'clock-jump',
          line,
          text: atNoon
            ? `The times go back at line ${line} as at noon, none is later than 12:59, and none says AM or PM. Which half of the day is meant cannot be told.`
            : `The time goes back by ${minutes < 1 ? 'less than a minute' : `${minutes} min`} at line ${line} and runs on from there. Which times are right?`,
          found: `${new Date(toMs).toISOString()} after ${new Date(fromMs).toISOString()}`,
          expected: 'times that go forward from row to row',
          mend: atNoon
            ? 'Let the logger write hours from 0 to 23 and send the file again, or say which rows to trust.'
            : 'Ask whoever set the clock. Rows in doubt are kept, marked, and stay out of rates, limits and fits.',
          choices: [
            choice('as-written', 'all of them, as they are written'),
            choice('doubt-before', 'those from this line on; the ones before are in doubt'),
            choice('doubt-after', 'those before this line; the ones from it on are in doubt'),
          ],
        }),
      rowsBelow,
    )
  }
}
