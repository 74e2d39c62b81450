import type { Quantity } from '../readings.ts'
import { type Block, isReordered, makeBlock } from './block.ts'
import { askOneOf, askUnfitUnit, noKnownChannel, oneOf } from './block-questions.ts'
import type { BodyTools } from './body.ts'
import { channelQuestion } from './cell-faults.ts'
import type { Curves } from './curves.ts'
import { type HeaderColumn, joinHeaders, joinStatistics, readHeader } from './header.ts'
import type { NumberReader } from './numbers.ts'
import { askReadingColumn } from './statistics.ts'
import type { FileDialect, Refusal, Restart } from './types.ts'
import { checkUnit, refuseWithoutUnit } from './unit-check.ts'
import { type UnitWords, unitSamples } from './unit-words.ts'
import { readUnit, type Unit, unitOf } from './units.ts'

export type UnitOrigin = FileDialect['unitFrom']

interface MakerTools extends BodyTools {
  numbers: NumberReader
  unitWords: UnitWords
  curves: Curves
  /** Where a name goes that the register lacks. */
  targets: (name: string) => string | null
}

/** Follows headers, unit rows and units of metadata through a file, and says what the rows under them hold. */
export class BlockMaker {
  block: Block | null = null
  unitFrom: UnitOrigin = null
  /** Unit in which the first pressures of the file are written, or its first values when it holds no pressure. */
  unitWritten: string | null = null
  readonly #tools: MakerTools
  #headerColumns: HeaderColumn[]
  #headerLine = 0
  #noteUnit: Unit | null = null
  #noteLine = 0
  #unitRowUnits: readonly (Unit | null)[] | null = null
  /** Names under the header at hand that nobody knows have yet to be asked about. */
  #namesPending = false
  #override: { from: Unit; to: Unit } | null = null

  constructor(tools: MakerTools) {
    this.#tools = tools
    this.#headerColumns = tools.dialect.columns
    if (tools.dialect.headerLine === 0) this.#make()
  }

  /** Takes a header. Gives the restart that it marks, or null for the first header and the rows that belong to it. */
  header(fields: readonly string[], line: number, sawRow: boolean): Restart | null {
    const { book, profile } = this.#tools
    const before = this.block
    const { columns } = readHeader(fields, book, profile)
    const further = before !== null && !sawRow
    this.#headerColumns = further ? joinHeaders(this.#headerColumns, columns) : columns
    if (!further) this.#unitRowUnits = null
    this.#headerLine = line
    this.#make()
    if (further || before === null || this.block === null) return null
    return { line, reordered: isReordered(before, this.block) }
  }

  /** Takes the row of units under a header. */
  unitRow(fields: readonly string[]): void {
    this.#unitRowUnits = fields.map((field) => {
      const reading = readUnit(field.trim().replace(/^[[(](.*)[\])]$/, '$1'))
      return reading.kind === 'unit' ? reading.unit : null
    })
    this.#make()
  }

  /** Takes a row under a header that says which column is the lowest, highest or mean value of its channel. */
  statisticRow(fields: readonly string[]): void {
    this.#headerColumns = joinStatistics(this.#headerColumns, fields)
    this.#make()
  }

  /** Takes the unit that a line of metadata names; gives the change where another one held before. */
  noteUnit(token: string | null, line: number): { from: Unit; to: Unit } | null {
    const to = this.#unitOfNote(token, line)
    if (to === null) return null
    const from = this.#noteUnit
    this.#noteUnit = to
    this.#noteLine = line
    if (this.block === null) return null
    this.#make()
    return from === null || from.factor === to.factor ? null : { from, to }
  }

  /** The unit that counts where a file names one: that one, or the one that a person said. */
  settleUnit(unit: Unit): Unit {
    const override = this.#override
    // What is written as volts names no unit of pressure that could be compared.
    if (unit.curve !== undefined || override === null || override.from.quantity !== unit.quantity) return unit
    return override.from.factor === unit.factor && override.from.offset === unit.offset ? override.to : unit
  }

  /** Unit of a line of metadata. One that tells no absolute quantity is asked about. */
  #unitOfNote(token: string | null, line: number): Unit | null {
    if (token === null) return null
    const reading = readUnit(token)
    if (reading.kind === 'unit') return reading.unit
    if (reading.kind === 'none') return null
    const said = this.#tools.unitWords.meaning(token)
    if (said === null) this.#tools.unitWords.ask(token, 'pressure', { line, column: 1 }, [])
    return said === 'leave-out' ? null : said
  }

  #make(): void {
    const unitRow = this.#unitRowUnits
    const { book, profile, sink, questions, dialect } = this.#tools
    const block = makeBlock(dialect.layout, this.#headerColumns, {
      book,
      profile,
      sink,
      noteUnit: this.#noteUnit,
      answeredUnits:
        profile.unit === null ? [unitOf(questions.answer('unit'))].filter((unit) => unit !== null) : [],
      curves: this.#tools.curves,
      doubtful: (token, column, quantity) => this.#doubtfulUnit(token, column, quantity ?? 'pressure'),
      unfit: (name, column, unit, quantity) =>
        askUnfitUnit(name, { line: this.#headerLine, column }, unit, quantity, questions),
      unitRow,
      oneOf: (name, positions) => oneOf(name, positions, questions),
      answerFor: this.#tools.targets,
      readingColumn: questions.answer('reading-of') ?? profile.readingColumn,
    })
    this.block = block
    if (unitRow !== null) this.unitFrom = 'unit-row'
    else if (this.#headerColumns.some(({ unit }) => unit.kind === 'unit')) this.unitFrom = 'header'
    else if (block.unitAt !== -1) this.unitFrom = 'column'
    else if (this.#noteUnit !== null) this.unitFrom = 'note'
    else this.unitFrom = profile.unit === null ? null : 'profile'
    this.#namesPending = true
    this.#checkUnit(block)
    for (const column of block.wide) if (column.unit !== null) column.unit = this.settleUnit(column.unit)
    if (block.unit !== null) block.unit = this.settleUnit(block.unit)
  }

  /** Asks about names that the register lacks; only when rows come, since a further header row may say more. */
  askNames(): void {
    const { block } = this
    if (!this.#namesPending || block === null) return
    this.#namesPending = false
    const { questions, book } = this.#tools
    // An answer holds for the whole file: what it does not fit stays out, and is not asked about again.
    if (questions.answer('reading-of') === null)
      askReadingColumn(
        block.unsettled,
        this.#headerColumns,
        this.#headerLine,
        this.#tools.dialect.rows[0],
        questions,
      )
    for (const { name, positions } of block.repeated) askOneOf(name, positions, this.#headerLine, questions)
    for (const { name, position } of block.unknown)
      questions.ask(`unknown-channel:${name}`, () => channelQuestion(name, this.#headerLine, position, book))
  }

  #doubtfulUnit(token: string, column: number, quantity: Quantity): Unit | 'leave-out' | null {
    const said = this.#tools.unitWords.meaning(token)
    if (said !== null) return said
    const name = this.#headerColumns[column - 1]?.name ?? ''
    const samples = unitSamples(this.#tools.dialect.rows, column - 1, () => name, this.#tools.numbers)
    this.#tools.unitWords.ask(token, quantity, { line: this.#headerLine, column }, samples)
    return null
  }

  #checkUnit(block: Block): void {
    const { dialect, profile, questions } = this.#tools
    const column =
      block.wide.find(({ unit }) => unit?.quantity === 'pressure' && unit.curve === undefined) ??
      block.wide.find(({ unit }) => unit !== null && unit.curve === undefined)
    const row = dialect.rows[0]
    const at = block.layout === 'wide' ? column?.at : block.unitAt
    const written =
      block.layout === 'wide'
        ? (column?.unit ?? null)
        : (unitOf(row?.fields[block.unitAt]?.trim()) ?? block.unit)
    if (written === null) return
    this.unitWritten ??= written.token
    // A person or the profile has said what this column is written in: nothing is left to compare.
    if (block.layout === 'wide' && !isPlainUnit(this.#headerColumns[at ?? -1])) return
    const line =
      this.unitFrom === 'note'
        ? this.#noteLine
        : this.unitFrom === 'column'
          ? (row?.line ?? 0)
          : this.#headerLine
    const place = { unit: written, line, column: this.unitFrom === 'note' ? 1 : (at ?? 0) + 1 }
    const to = checkUnit(place, dialect, block, profile, questions, this.#tools.context)
    this.#override = to === null ? null : { from: written, to }
  }

  /** Whether the first block can give readings at all; asked when its first row comes. */
  judge(): Refusal | null {
    const { dialect, book, profile } = this.#tools
    const block = this.block
    if (block === null) return null
    const unknown = block.unknown[0]
    if (block.wide.length === 0 && block.repeated.length + block.unsettled.length > 0) return null
    // Before anything is confirmed about a source, names that the register lacks are asked about one by one.
    if (
      profile.layout === null &&
      profile.columns.length === 0 &&
      (unknown === undefined || book.names().length > 0)
    )
      return refuseWithoutUnit(block, dialect, this.#tools)
    if (block.layout === 'wide' && block.wide.length === 0)
      return noKnownChannel(unknown?.name ?? '', this.#headerLine, unknown?.position ?? 1, book)
    if (block.layout === 'long') {
      const names = dialect.rows.map(({ fields, line }) => ({
        name: (fields[block.channelAt] ?? '').trim(),
        line,
      }))
      const known = names.some(
        ({ name }) => !book.closed || book.isKnown(name) || this.#tools.targets(name) !== null,
      )
      const first = names[0]
      if (!known && first !== undefined)
        return noKnownChannel(first.name, first.line, block.channelAt + 1, book)
    }
    return refuseWithoutUnit(block, dialect, this.#tools)
  }
}

function isPlainUnit(column: HeaderColumn | undefined): boolean {
  return column === undefined || column.unit.kind === 'unit' || column.unit.kind === 'none'
}
