import { MARKS } from '../readings.ts'
import type { TimeFormat } from '../schemas/source-profile.ts'
import { EARLIEST_MS } from './limits.ts'
import type { StartTime } from './start-time.ts'
import type { Fault } from './tally.ts'
import { isTimeOfDay, TimeReader } from './time-text.ts'
import { wallText, type ZoneClock } from './zones.ts'

/** The time of one row: an instant, two that it may be, or what is wrong with it. */
export type RowTime =
  | { kind: 'instant'; atMs: number; marks: number }
  /** The hour that the autumn clock change repeats. */
  | { kind: 'twice'; wallMs: number; first: number; second: number }
  /** A time of years in which no logger ran: its clock had lost its setting, only spans count. */
  | { kind: 'reset'; atMs: number }
  /** A time of the hour that the spring clock change leaves out. */
  | { kind: 'nonexistent'; wallMs: number; fault: Fault }
  | { kind: 'fault'; fault: Fault }

const HALF_DAY_MS = 43_200_000

/** Reads the times of rows: date and time of day in one cell, in two, or with the date only where it changes. */
export class RowTimes {
  /** Whether the last time read had to be rounded, as a leap second has. */
  rounded = false
  /** Offset written in the last time read, in minutes; NaN when it carried none. */
  offset = Number.NaN
  /** Whether any time of the file passed noon or named its half of the day: then its clock counts 24 hours. */
  fullDay = false
  readonly #reader: TimeReader
  readonly #zone: ZoneClock
  #start: StartTime | null
  /** Day (start, wall time) of the last row that named one. */
  #dayMs = Number.NaN
  /** Last wall time under a day that was carried down. */
  #carriedMs = Number.NaN

  constructor(format: TimeFormat, decimalMark: '.' | ',', zone: ZoneClock, start: StartTime | null) {
    this.#reader = new TimeReader(format, decimalMark)
    this.#zone = zone
    this.#start = start
    // Only times that people write count to twelve and begin anew.
    this.fullDay = /^(?:epoch|serial|elapsed)/.test(format)
  }

  /** Takes the day of the rows that name none from a line of its own. */
  setDay(text: string): void {
    const dayMs = this.#reader.readDate(text)
    if (!Number.isNaN(dayMs)) this.#dayMs = dayMs
  }

  /** Counts seconds from another start from here on: the logger began anew inside the file. */
  restart(start: StartTime | null): void {
    this.#start = start
  }

  read(text: string, dateText: string | null, column: number): RowTime {
    const reader = this.#reader
    const carried = dateText === null ? isTimeOfDay(text) : dateText.trim() === ''
    if (!this.#readWall(text, dateText, carried)) return this.#unreadable(text, dateText, column)
    this.rounded = reader.rounded
    const { wallMs, offset } = reader
    this.offset = offset
    if (reader.half || (wallMs % (2 * HALF_DAY_MS)) - HALF_DAY_MS >= 3_600_000) this.fullDay = true
    if (carried && wallMs < this.#carriedMs - HALF_DAY_MS) return this.#noNewDate(text, column)
    this.#carriedMs = wallMs
    if (this.#start !== null)
      return {
        kind: 'instant',
        atMs: this.#start.atMs + wallMs,
        marks: this.#start.reconstructed ? MARKS['time-reconstructed'] : 0,
      }
    if (!Number.isNaN(offset)) return instant(wallMs - offset * 60_000)
    const [first, second] = this.#zone.instants(wallMs)
    if (first === undefined) return { kind: 'nonexistent', wallMs, fault: this.#nonexistent(wallMs, column) }
    if (second !== undefined && first >= EARLIEST_MS) return { kind: 'twice', wallMs, first, second }
    return instant(first)
  }

  /** Reads into the wall time of the reader; remembers the day for rows that name none. */
  #readWall(text: string, dateText: string | null, carried: boolean): boolean {
    const reader = this.#reader
    if (!carried && dateText === null) {
      if (!reader.read(text)) return false
      const { wallMs } = reader
      this.#dayMs = wallMs - (((wallMs % (2 * HALF_DAY_MS)) + 2 * HALF_DAY_MS) % (2 * HALF_DAY_MS))
      return true
    }
    if (!carried) this.#dayMs = reader.readDate(dateText ?? '')
    return !Number.isNaN(this.#dayMs) && reader.readTimeOfDay(text, this.#dayMs)
  }

  #unreadable(text: string, dateText: string | null, column: number): RowTime {
    return {
      kind: 'fault',
      fault: {
        code: 'unreadable-time',
        column,
        found: `“${(dateText === null ? text : `${dateText} ${text}`).trim().slice(0, 60)}”`,
        expected: `a time written like the others of this file (${this.#reader.format})`,
        mend: 'Correct the time in a copy and send that as a file of its own, or leave the line out.',
      },
    }
  }

  #noNewDate(text: string, column: number): RowTime {
    return {
      kind: 'fault',
      fault: {
        code: 'unreadable-time',
        column,
        found: `“${text.trim().slice(0, 60)}” after midnight, and no new date`,
        expected: 'a date in the first row of each day',
        mend: 'Write the date of the new day into a copy and send that as a file of its own.',
      },
    }
  }

  #nonexistent(wallMs: number, column: number): Fault {
    return {
      code: 'nonexistent-time',
      column,
      found: `${wallText(wallMs)}, an hour that the spring clock change leaves out in ${this.#zone.zone}`,
      expected: 'a time that exists on the clock of the source',
      mend: 'The logger probably does not change its clock: an engineer sets a fixed offset in the profile of the source.',
    }
  }
}

function instant(atMs: number): RowTime {
  return atMs >= EARLIEST_MS ? { kind: 'instant', atMs, marks: 0 } : { kind: 'reset', atMs }
}
