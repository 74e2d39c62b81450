import { type Quantity, qualityCode } from '../readings.ts'
import type { Block, WideColumn } from './block.ts'
import { channelTarget, voltsOf } from './block.ts'
import { askUnfitUnit } from './block-questions.ts'
import { cellFault, channelQuestion, wordQuestion } from './cell-faults.ts'
import type { CellFault, CellReader } from './cells.ts'
import type { ChannelBook } from './channel-names.ts'
import type { Curves } from './curves.ts'
import { FUTURE_MS } from './limits.ts'
import { isCutNumber, type NumberReader } from './numbers.ts'
import type { QuestionList } from './questions.ts'
import type { ReadingSink } from './sink.ts'
import type { LineTally } from './tally.ts'
import { plainWord } from './text.ts'
import type { UnitWords } from './unit-words.ts'
import { readUnit, toSi, type Unit, unitFits } from './units.ts'

const SUSPECT = qualityCode('suspect')
const GOOD = qualityCode('good')
const OFF = qualityCode('off')
const STARTING = qualityCode('starting')

/** Columns may be written with fewer digits than their neighbour: two digits are off by 5 % at most. */
const BOUND_ROUNDING = 0.05

/** A row cut into fields, with the header it stands under. */
export interface Row {
  fields: string[]
  text: string
  line: number
  block: Block
}

export type DoubtCounts = Record<
  'zero' | 'negative' | 'ceiling' | 'open-sensor' | 'spaced' | 'future' | 'conflict' | 'dates' | 'bounds',
  number
>

export interface RowTools {
  cells: CellReader
  sink: ReadingSink
  tally: LineTally
  questions: QuestionList
  book: ChannelBook
  decimalMark: '.' | ','
  nowMs: number
  unitWords: UnitWords
  curves: Curves
  /** Minutes after a gauge was switched on in which it counts as starting. */
  startingMs: number
  /** Where a name goes that the register lacks. */
  targetFor: (name: string) => string | null
  numbers: NumberReader
  /** Replaces a unit that the file names by the one a person said. */
  settleUnit: (unit: Unit) => Unit
}

/** Turns rows whose instant is known into readings, and gives every row its outcome. */
export class RowReader {
  readonly doubts: DoubtCounts = {
    zero: 0,
    negative: 0,
    ceiling: 0,
    'open-sensor': 0,
    spaced: 0,
    future: 0,
    conflict: 0,
    dates: 0,
    bounds: 0,
  }
  leftOut = 0
  /** First row of a long file whose unit is another than that of the row before. */
  unitChange: { line: number; from: string; to: string } | null = null
  #rowUnitBefore: Unit | null = null
  readonly #tools: RowTools
  /** Dates of the channels, by their index. */
  readonly #dates: { fromMs: number; untilMs: number }[] = []
  /** When each gauge came on, by the channel's index; null while it is off. Before it was off nothing is known. */
  readonly #startedAt: (number | null | undefined)[] = []
  /** Results of the row at hand. */
  #kept = 0
  #duplicates = 0
  #firstFault: CellFault | null = null
  #flagged = false

  constructor(tools: RowTools) {
    this.#tools = tools
  }

  /** `flagged`: its time needs a look, though it earns no mark. */
  read(row: Row, atMs: number, marks: number, flagged = false): void {
    this.#kept = 0
    this.#duplicates = 0
    this.#firstFault = null
    this.#flagged = marks !== 0 || flagged
    if (row.block.layout === 'wide') this.#wide(row, atMs, marks)
    else if (!this.#long(row, atMs, marks)) return
    const { tally } = this.#tools
    if (this.#kept > 0) tally.add(this.#flagged || this.#firstFault !== null ? 'flagged' : 'accepted')
    else if (this.#firstFault !== null) tally.skip(this.#firstFault)
    else if (this.#duplicates > 0) tally.skip('duplicate')
    else tally.skip('left-out')
  }

  #wide(row: Row, atMs: number, marks: number): void {
    const { cells } = this.#tools
    for (const column of row.block.wide) {
      const text = row.fields[column.at] ?? ''
      const fault = cells.read(text, column.quantity, column.unit)
      if (fault !== null) this.#fault(row, fault, text, column.at, column.quantity, column.channel)
      else {
        if (column.bounds !== undefined) this.#holdAgainstBounds(row, column.bounds)
        this.#emit(column.channel, atMs, row, text, marks)
      }
    }
  }

  /** Flags a row whose reading lies outside the lowest and highest value that the row itself gives. */
  #holdAgainstBounds({ fields }: Row, bounds: NonNullable<WideColumn['bounds']>): void {
    const { cells, numbers } = this.#tools
    for (const { at, unit, kind } of bounds) {
      const bound = toSi(numbers.read(fields[at] ?? ''), unit)
      // Where one of the two is no number there is nothing to compare.
      const beyond = kind === 'lowest' ? bound - cells.value : cells.value - bound
      if (!(beyond > BOUND_ROUNDING * Math.abs(bound))) continue
      this.doubts.bounds += 1
      this.#flagged = true
      return
    }
  }

  /** False when the row's outcome has been counted already. */
  #long(row: Row, atMs: number, marks: number): boolean {
    const { cells, sink, tally, questions, book } = this.#tools
    const { block, fields } = row
    const name = (fields[block.channelAt] ?? '').trim()
    const target = channelTarget(name, { book, answerFor: this.#tools.targetFor })
    if (target === 'leave-out') {
      this.leftOut += 1
      tally.skip('left-out')
      return false
    }
    if (target === null) {
      questions.ask(`unknown-channel:${name}`, () =>
        channelQuestion(name, row.line, block.channelAt + 1, book),
      )
      tally.reject(row.line, row.text, {
        code: 'unknown-channel',
        column: block.channelAt + 1,
        found: `“${name}”`,
        expected: 'a channel of this source in the register',
        mend: 'Say where the channel belongs, or add it in the register and read the file again.',
      })
      return false
    }
    const written = this.#rowUnit(row)
    const unit = written === 'unknown' ? written : this.#fitted(row, target, written)
    if (unit === 'unfit') return false
    if (unit === 'unknown') {
      const token = (fields[block.unitAt] ?? '').trim()
      const valueText = fields[block.valueAt] ?? ''
      tally.reject(
        row.line,
        row.text,
        cellFault('unknown-unit', valueText, token, block.unitAt + 1, this.#tools.decimalMark),
      )
      this.#meetUnit(row, token, valueText, block.unitAt, target.quantity ?? 'pressure', target.name)
      return false
    }
    const quantity: Quantity = target.quantity ?? unit?.quantity ?? 'pressure'
    const text = fields[block.valueAt] ?? ''
    const status = block.statusAt === -1 ? '' : (fields[block.statusAt] ?? '')
    const fault = cells.read(text, quantity, unit)
    if (fault !== null)
      this.#fault(row, fault, text, block.valueAt, quantity, sink.channel(target.name, quantity))
    else if (cells.applyStatus(status, quantity) !== null)
      this.#fault(row, 'unknown-word', status, block.statusAt, quantity, sink.channel(target.name, quantity))
    else {
      this.#noteUnitChange(row, unit)
      this.#emit(sink.channel(target.name, quantity), atMs, row, text, marks)
      const volts = unit?.curve === undefined ? null : voltsOf(target.name, this.#tools)
      // The volts as they are written, beside the pressure made of them.
      if (volts !== null && cells.read(text, volts.quantity, volts.unit) === null)
        this.#emit(volts.channel, atMs, row, text, marks)
    }
    return true
  }

  /**
   * The unit in which a row of a long file is read: volts by the curve of the gauge, if there is one. A unit of its
   * own that measures something else costs the row; one that holds for rows that name none says nothing about it.
   */
  #fitted(
    row: Row,
    { name, quantity }: { name: string; quantity: Quantity | null },
    unit: Unit | null,
  ): Unit | null | 'unfit' {
    if (unit === null || quantity === null || quantity === 'switch' || unitFits(quantity, unit)) return unit
    const byCurve = quantity === 'pressure' ? this.#tools.curves.unitFor(name, unit) : null
    if (byCurve !== null) return byCurve
    const { block, fields } = row
    const own = block.unitAt === -1 ? '' : (fields[block.unitAt] ?? '').trim()
    if (own === '') return null
    const { tally, questions, decimalMark } = this.#tools
    const place = { line: row.line, column: block.unitAt + 1 }
    askUnfitUnit(name, place, unit, quantity, questions)
    tally.reject(
      row.line,
      row.text,
      cellFault('unknown-unit', fields[block.valueAt] ?? '', own, place.column, decimalMark),
    )
    return 'unfit'
  }

  #rowUnit(row: Row): Unit | null | 'unknown' {
    const { block } = row
    if (block.unitAt === -1) return block.unit
    const token = (row.fields[block.unitAt] ?? '').trim()
    if (token === '') return block.unit
    const reading = readUnit(token)
    if (reading.kind === 'unit') return this.#tools.settleUnit(reading.unit)
    const said = this.#tools.unitWords.meaning(token)
    return said === null || said === 'leave-out' ? 'unknown' : said
  }

  /** Flags the first row of a long file whose values are in another unit of the same quantity. */
  #noteUnitChange({ line }: Row, unit: Unit | null): void {
    const before = this.#rowUnitBefore
    if (unit === null) return
    this.#rowUnitBefore = unit
    if (this.unitChange !== null || before === null || before.quantity !== unit.quantity) return
    if (before.factor === unit.factor && before.offset === unit.offset) return
    this.unitChange = { line, from: before.token, to: unit.token }
    this.#flagged = true
  }

  #meetUnit(
    { line, fields, block }: Row,
    token: string,
    text: string,
    at: number,
    quantity: Quantity,
    channel: string,
  ): void {
    const { numbers, unitWords } = this.#tools
    const figure = /^[<>]?=?\s*([+-]?[\d.,]+(?:[eEdD][+-]?\d+)?)/.exec(text.trim())?.[1] ?? ''
    const sample = { line, text: (fields[at === block.unitAt ? block.valueAt : at] ?? '').trim(), channel }
    unitWords.meet(token, quantity, { line, column: at + 1 }, { ...sample, number: numbers.read(figure) })
  }

  #fault(row: Row, fault: CellFault, text: string, at: number, quantity: Quantity, channel: number): void {
    const { tally, questions, cells, decimalMark } = this.#tools
    this.#firstFault ??= fault
    tally.rejectCell(row.line, row.text, cellFault(fault, text, cells.badUnit, at + 1, decimalMark))
    if (fault === 'unknown-unit')
      this.#meetUnit(row, cells.badUnit, text, at, quantity, this.#tools.sink.channels[channel]?.name ?? '')
    if (fault === 'unknown-word')
      questions.ask(`unknown-word:${plainWord(text)}`, () => wordQuestion(text, row.line, at + 1))
  }

  /** Whether the register says that the channel did not exist at this time. */
  #isOutsideDates(channel: number, atMs: number): boolean {
    let dates = this.#dates[channel]
    if (dates === undefined) {
      const match = this.#tools.book.match(this.#tools.sink.channels[channel]?.name ?? '')
      const known = match.kind === 'known' ? match.channel : null
      dates = {
        fromMs: known?.fromMs ?? Number.NEGATIVE_INFINITY,
        untilMs: known?.untilMs ?? Number.POSITIVE_INFINITY,
      }
      this.#dates[channel] = dates
    }
    return atMs < dates.fromMs || atMs >= dates.untilMs
  }

  /** Quality of a reading, seen that its gauge may have been switched on shortly before. */
  #started(channel: number, atMs: number, quality: number): number {
    const { startingMs } = this.#tools
    if (startingMs === 0) return quality
    if (quality === OFF) this.#startedAt[channel] = null
    else if (quality === GOOD && this.#startedAt[channel] === null) this.#startedAt[channel] = atMs
    const since = atMs - (this.#startedAt[channel] ?? Number.NaN)
    return quality === GOOD && since >= 0 && since < startingMs ? STARTING : quality
  }

  #emit(channel: number, atMs: number, row: Row, text: string, marks: number): void {
    const { cells, sink, nowMs } = this.#tools
    let { quality } = cells
    if (cells.doubt !== null) {
      this.doubts[cells.doubt] += 1
      this.#flagged = true
    }
    if (atMs > nowMs + FUTURE_MS) {
      this.doubts.future += 1
      this.#flagged = true
      if (quality === GOOD) quality = SUSPECT
    }
    if (this.#isOutsideDates(channel, atMs)) {
      this.doubts.dates += 1
      this.#flagged = true
      if (quality === GOOD) quality = SUSPECT
    }
    quality = this.#started(channel, atMs, quality)
    const result = sink.emit({
      channel,
      atMs,
      value: cells.value,
      bound: cells.bound,
      quality,
      marks,
      line: row.line,
      text,
    })
    if (result === 'duplicate') {
      this.#duplicates += 1
      return
    }
    this.#kept += 1
    if (result === 'conflict') {
      this.#flagged = true
      this.doubts.conflict += 1
    }
  }
}

/** Whether the last line of the file was cut while it was written. */
export function isCutRow(fields: readonly string[], block: Block): boolean {
  if (fields.length < block.fieldCount) return true
  return isCutNumber(fields[fields.length - 1] ?? '')
}
