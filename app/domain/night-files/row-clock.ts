import { MARKS } from '../readings.ts'
import type { BodyTools } from './body.ts'
import { ResetStretches, resetFault } from './clock-reset.ts'
import { ClockWatch } from './clock-watch.ts'
import { EARLIEST_MS, MAX_HELD_ROWS } from './limits.ts'
import { askClockChanges, OffsetWatch, offsetRemark } from './offsets.ts'
import { type HeldRow as HeldTime, resolveRepeatedHour } from './repeated-hour.ts'
import type { Row, RowReader } from './row-reader.ts'
import { RowTimes } from './row-times.ts'
import { startInstant } from './start-time.ts'
import type { Remark } from './types.ts'

/** A row of the hour that the clock change repeats, until the hour is over. */
interface HeldRow extends HeldTime {
  row: Row
}

/**
 * Gives the rows of a file their instants, in the order in which they stand: clock changes, clocks that lost their
 * setting, steps back, times too coarse to tell rows apart. Rows go on from here to be read; what was noticed becomes a
 * remark.
 */
export class RowClock {
  readonly #tools: BodyTools
  readonly #rows: RowReader
  readonly #remarks: Remark[]
  readonly #times: RowTimes | null
  readonly #resets: ResetStretches | null
  readonly #watch: ClockWatch
  readonly #offsets: OffsetWatch
  #held: HeldRow[] = []
  #lastMs: number | null = null
  #coarseRows = 0

  constructor(tools: BodyTools, rows: RowReader, remarks: Remark[]) {
    this.#tools = tools
    this.#rows = rows
    this.#remarks = remarks
    const { dialect, questions, context } = tools
    const { timeFormat, zone } = dialect
    this.#times =
      timeFormat === null || zone === null
        ? null
        : new RowTimes(timeFormat, dialect.decimalMark, zone, dialect.start)
    this.#resets = zone === null ? null : new ResetStretches(questions, context, zone, dialect.periodMs)
    this.#watch = new ClockWatch(questions)
    this.#offsets = new OffsetWatch(context.siteZone)
  }

  /** Whether it is settled how times are written and on which clock; without that no row can be read. */
  get isSettled(): boolean {
    return this.#times !== null
  }

  /** Instant of the row before; null at the beginning. */
  get lastMs(): number | null {
    return this.#lastMs
  }

  get backSteps(): number {
    return this.#watch.backSteps
  }

  /** Takes the date that a line of its own names for the rows under it. */
  setDay(date: string): void {
    this.#times?.setDay(date)
  }

  /** A new start inside a file that counts seconds. One that cannot be is asked about with its first row. */
  restart(text: string): void {
    const { startFormat, zone } = this.#tools.dialect
    if (this.#tools.dialect.timeFormat !== 'elapsed-s' || startFormat === null || zone === null) return
    const atMs = startInstant(text, startFormat, zone)
    this.#times?.restart(atMs >= EARLIEST_MS ? { atMs, reconstructed: false } : null)
  }

  /** Reads a row whose fields are whole, at once or when its hour is over. */
  read(row: Row): void {
    const times = this.#times
    if (times === null) throw new Error('A row was read before it was settled how times are written')
    const { block, fields, line, text } = row
    const { tally, dialect, questions } = this.#tools
    const dateText = block.dateAt === -1 ? null : (fields[block.dateAt] ?? '')
    const timeText = fields[block.timeAt] ?? ''
    const time = times.read(timeText, dateText, block.timeAt + 1)
    if (time.kind === 'fault' || time.kind === 'nonexistent') {
      if (time.kind === 'nonexistent') askClockChanges(time.wallMs, time.fault, line, dialect.zone, questions)
      tally.reject(line, text, time.fault)
      return
    }
    if (time.kind === 'reset') {
      this.#release(null)
      const atMs = this.#resets?.read(time.atMs, line, timeText, this.#lastMs) ?? null
      if (atMs === null) tally.reject(line, text, resetFault(timeText, block.timeAt + 1))
      else this.#rows.read(row, atMs, MARKS['time-reconstructed'])
      return
    }
    // Steps back count within a channel: a long file has a row per channel and time.
    const track = block.layout === 'long' ? (fields[block.channelAt] ?? '') : ''
    if (time.kind === 'twice') {
      this.#held.push({ row, track, wallMs: time.wallMs, first: time.first, second: time.second })
      if (this.#held.length >= MAX_HELD_ROWS) this.#release(null)
      return
    }
    this.#release(time.atMs)
    this.#resets?.close(time.atMs)
    const watched = this.#watch.see(track, time.atMs, line)
    const coarse = dialect.coarse ? MARKS['time-coarse'] | MARKS['order-kept'] : 0
    if (dialect.coarse) this.#coarseRows += 1
    const change = this.#offsets.see(times.offset, time.atMs)
    if (change === 'first') this.#remarks.push(offsetRemark(line, time.atMs))
    const flagged = times.rounded || change !== null
    this.#lastMs = time.atMs
    this.#rows.read(row, time.atMs, time.marks | watched | coarse, flagged)
  }

  /** Reads the rows of a repeated hour, now that all of them are there. */
  #release(afterMs: number | null): void {
    const held = this.#held
    const first = held[0]
    if (first === undefined) return
    this.#held = []
    const { periodMs } = this.#tools.dialect
    const instants = resolveRepeatedHour(held, { beforeMs: this.#lastMs, afterMs, periodMs })
    let doubtful = 0
    held.forEach((entry, i) => {
      const atMs = instants[i] as number
      const ambiguous = Number.isNaN(atMs)
      if (ambiguous) doubtful += 1
      this.#rows.read(entry.row, ambiguous ? entry.first : atMs, ambiguous ? MARKS['time-ambiguous'] : 0)
      this.#lastMs = ambiguous ? entry.second : atMs
    })
    this.#remarks.push({
      kind: doubtful > 0 ? 'ambiguous-hour' : 'repeated-hour',
      text:
        doubtful > 0
          ? `The hour that the clock change repeats cannot be told apart in ${doubtful} rows. They are kept, marked, and left out of rates and limits.`
          : 'The clock goes back one hour inside this file. Both passes through the hour are kept apart by their order.',
      line: first.row.line,
      channel: null,
      atMs: first.first,
      count: held.length,
    })
  }

  end(): void {
    this.#release(null)
    this.#watch.end(this.#times?.fullDay === false)
    if (this.#coarseRows > 0)
      this.#remarks.push({
        kind: 'coarse-time',
        text: 'Several rows stand under one time. They keep their order and are marked; no time between them is made up.',
        line: null,
        channel: null,
        atMs: null,
        count: this.#coarseRows,
      })
  }
}
