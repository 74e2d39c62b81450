import type { TimeFormat } from '../schemas/source-profile.ts'
import { EARLIEST_MS } from './limits.ts'
import type { Fault } from './tally.ts'
import { TimeReader } from './time-text.ts'
import { wallText, type ZoneClock } from './zones.ts'

/** The time of one row: an instant, two that it may be, or what is wrong with it. */
export type RowTime =
  | { kind: 'instant'; atMs: number }
  /** The hour that the autumn clock change repeats. */
  | { kind: 'twice'; wallMs: number; first: number; second: number }
  | { kind: 'fault'; fault: Fault }

/** Reads the times of rows: date and time of day in one cell, or in two. */
export class RowTimes {
  readonly #reader: TimeReader
  readonly #zone: ZoneClock

  constructor(format: TimeFormat, decimalMark: '.' | ',', zone: ZoneClock) {
    this.#reader = new TimeReader(format, decimalMark)
    this.#zone = zone
  }

  read(text: string, dateText: string | null, column: number): RowTime {
    const reader = this.#reader
    let ok: boolean
    if (dateText === null) ok = reader.read(text)
    else {
      const dayMs = reader.readDate(dateText)
      ok = !Number.isNaN(dayMs) && reader.readTimeOfDay(text, dayMs)
    }
    if (!ok)
      return {
        kind: 'fault',
        fault: {
          code: 'unreadable-time',
          column,
          found: `“${(dateText === null ? text : `${dateText} ${text}`).trim().slice(0, 60)}”`,
          expected: `a time written like the others of this file (${reader.format})`,
          mend: 'Correct the time in a copy and send that as a file of its own, or leave the line out.',
        },
      }
    const { wallMs, offset } = reader
    if (!Number.isNaN(offset)) return this.#instant(wallMs - offset * 60_000, text, column)
    const instants = this.#zone.instants(wallMs)
    const [first, second] = instants
    if (first === undefined)
      return {
        kind: 'fault',
        fault: {
          code: 'nonexistent-time',
          column,
          found: `${wallText(wallMs)}, an hour that the spring clock change leaves out in ${this.#zone.zone}`,
          expected: 'a time that exists on the clock of the source',
          mend: 'The logger probably does not change its clock: an engineer sets a fixed offset in the profile of the source.',
        },
      }
    if (second !== undefined && first >= EARLIEST_MS) return { kind: 'twice', wallMs, first, second }
    return this.#instant(first, text, column)
  }

  #instant(atMs: number, text: string, column: number): RowTime {
    if (atMs >= EARLIEST_MS) return { kind: 'instant', atMs }
    return {
      kind: 'fault',
      fault: {
        code: 'clock-reset',
        column,
        found: `“${text.trim()}”, the time a logger falls back to when its clock has lost its setting`,
        expected: `a time after ${new Date(EARLIEST_MS).getUTCFullYear()}`,
        mend: 'Set the clock of the logger; rows with such times are left out.',
      },
    }
  }
}
