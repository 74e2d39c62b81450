import { MARKS, QUANTITIES, type Quantity } from '../readings.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import { type Block, isReordered, makeBlock, namedTargets } from './block.ts'
import { channelQuestion } from './cell-faults.ts'
import { CellReader } from './cells.ts'
import type { ChannelBook } from './channel-names.ts'
import { ResetStretches, resetFault } from './clock-reset.ts'
import { ClockWatch } from './clock-watch.ts'
import { joinDecimalCommas, twoWays } from './comma-pairs.ts'
import type { Dialect } from './dialect.ts'
import { splitFields } from './fields.ts'
import { type HeaderColumn, joinHeaders, looksLikeHeader, looksLikeUnitRow, readHeader } from './header.ts'
import { EARLIEST_MS, MAX_HELD_ROWS } from './limits.ts'
import { directiveSeparator, isComment, isFooter, readNote } from './line-kinds.ts'
import { NumberReader } from './numbers.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { OpenRecord } from './quoted-lines.ts'
import { resolveRepeatedHour } from './repeated-hour.ts'
import { isCutRow, type Row, RowReader } from './row-reader.ts'
import { RowTimes } from './row-times.ts'
import type { ReadingSink } from './sink.ts'
import { startInstant } from './start-time.ts'
import type { Fault, LineTally } from './tally.ts'
import type { ReadContext, Refusal, Remark, Restart } from './types.ts'
import { checkUnit, refuseWithoutUnit } from './unit-check.ts'
import { UnitWords, unitSamples } from './unit-words.ts'
import { readUnit, type Unit, unitOf, unitsOf } from './units.ts'
import { WordBook } from './words.ts'
import { offsetAt, offsetText } from './zones.ts'

export interface BodyTools {
  dialect: Dialect
  profile: SourceProfile
  context: ReadContext
  book: ChannelBook
  questions: QuestionList
  sink: ReadingSink
  tally: LineTally
}

interface HeldRow {
  row: Row
  track: string
  wallMs: number
  first: number
  second: number
}

/** Goes through the lines of a file whose dialect is settled, and gives each its outcome. */
export class FileBody {
  readonly restarts: Restart[] = []
  readonly remarks: Remark[] = []
  readonly rows: RowReader
  /** Set when the header shows that nothing of the file can be read. */
  refusal: Refusal | null = null
  block: Block | null = null
  noteUnit: Unit | null = null
  unitFrom: 'header' | 'note' | 'unit-row' | 'column' | 'profile' | null = null
  /** Unit in which the first pressures of the file are written, or its first values when it holds no pressure. */
  unitWritten: string | null = null
  get backSteps(): number {
    return this.#watch.backSteps
  }
  readonly #tools: BodyTools
  readonly #times: RowTimes | null
  readonly numbers: NumberReader
  readonly #unitWords: UnitWords
  readonly #resets: ResetStretches | null
  #headerColumns: HeaderColumn[] = []
  #headerLine = 0
  #noteLine = 0
  #sawRow = false
  #open: OpenRecord | null = null
  #unitRowUnits: readonly (Unit | null)[] | null = null
  /** Names under the header at hand that nobody knows have yet to be asked about. */
  #namesPending = false
  #override: { from: Unit; to: Unit } | null = null
  #held: HeldRow[] = []
  #lastMs: number | null = null
  #offset = Number.NaN
  #coarseRows = 0
  readonly #watch: ClockWatch
  readonly #targets: (name: string) => string | null

  constructor(tools: BodyTools) {
    this.#tools = tools
    this.#targets = namedTargets(tools.questions, tools.profile)
    this.#watch = new ClockWatch(tools.questions)
    const { dialect, profile, context, questions, sink, tally, book } = tools
    const numbers = new NumberReader({
      decimalMark: dialect.decimalMark,
      thousandsMark: profile.thousandsMark,
      bareExponent: profile.bareExponent,
    })
    const unitWords = new UnitWords(questions, profile.units, context)
    this.numbers = numbers
    this.#unitWords = unitWords
    const words = new WordBook({ ...profile.words, ...questions.words() })
    this.rows = new RowReader({
      cells: new CellReader(numbers, words, [...profile.sentinels, ...questions.floors()], (token) =>
        unitWords.meaning(token),
      ),
      unitWords,
      numbers,
      targetFor: this.#targets,
      sink,
      tally,
      questions,
      book,
      decimalMark: dialect.decimalMark,
      nowMs: context.nowMs,
      settleUnit: (unit) => this.#settleUnit(unit),
    })
    this.#times =
      dialect.timeFormat === null || dialect.zone === null
        ? null
        : new RowTimes(dialect.timeFormat, dialect.decimalMark, dialect.zone, dialect.start)
    this.#headerColumns = dialect.columns
    if (dialect.headerLine === 0) this.#makeBlock()
    this.#resets =
      dialect.zone === null ? null : new ResetStretches(questions, context, dialect.zone, dialect.periodMs)
  }

  #settleUnit(unit: Unit): Unit {
    const override = this.#override
    if (override === null || override.from.quantity !== unit.quantity) return unit
    return override.from.factor === unit.factor && override.from.offset === unit.offset ? override.to : unit
  }

  line(text: string, line: number, terminated: boolean, tooLong: boolean): void {
    const { tally, dialect, book } = this.#tools
    if (this.#open !== null && this.#continueQuoted(text, line, terminated, tooLong)) return
    if (tooLong) {
      this.#reject(
        line,
        '',
        'too-long',
        'a line of more than a million characters',
        'short lines, one row each',
      )
      return
    }
    if (text.includes('\u0000')) {
      this.#reject(
        line,
        text.replaceAll('\u0000', '␀'),
        'damaged',
        'NUL bytes, as a disk fault leaves them',
        'text',
      )
      return
    }
    if (text.trim() === '') {
      tally.note(line, text)
      return
    }
    if (this.block === null && directiveSeparator(text) !== null) {
      tally.add('directive')
      return
    }
    if (isComment(text, dialect.separator)) {
      this.#note(text, line)
      return
    }
    const split = splitFields(text, dialect.separator)
    if (split.kind === 'open-quote' && this.block !== null && terminated) {
      this.#open = new OpenRecord({ text, line, terminated })
      return
    }
    if (split.kind !== 'fields') {
      this.#rejectQuote(text, line)
      return
    }
    const { fields } = split
    // Rows begin with a figure, nearly all of them; only the others can be headers.
    if (!/^\s*"?\d/.test(text)) {
      if (looksLikeHeader(fields, book)) {
        this.#header(fields, line)
        return
      }
      if (this.#sawRow ? isFooter(text) : fields.length === 1 && isFooter(text)) {
        tally.skip('footer')
        return
      }
      if (this.block !== null && !this.#sawRow && looksLikeUnitRow(fields)) {
        this.#unitRow(fields)
        return
      }
    }
    if (this.block === null || (!this.#sawRow && fields.length === 1)) {
      this.#note(text, line)
      return
    }
    this.#row({ fields, text, line, block: this.block }, terminated)
  }

  #rejectQuote(text: string, line: number): void {
    const found = 'a quotation mark that is not closed'
    this.#reject(line, text, 'broken-quote', found, 'quotation marks in pairs')
  }

  /** Adds a line to the record whose quoted cell is open. False when the line stands for itself. */
  #continueQuoted(text: string, line: number, terminated: boolean, tooLong: boolean): boolean {
    const open = this.#open
    const block = this.block
    if (open === null || block === null) return false
    const whole = !tooLong && !text.includes('\u0000')
    const result = whole
      ? open.add({ text, line, terminated }, this.#tools.dialect.separator, block.fieldCount)
      : 'broken'
    if (result === 'open') return true
    if (result === 'broken') {
      this.#closeQuoted()
      // Replaying may have opened another record that this line goes on with.
      return this.#open !== null && this.#continueQuoted(text, line, terminated, tooLong)
    }
    this.#open = null
    const [first, ...others] = open.lines
    if (first === undefined) return false
    this.#row({ fields: result, text: first.text, line: first.line, block }, terminated)
    for (const other of others) this.#tools.tally.note(other.line, other.text)
    return true
  }

  /** Gives up on an open record: its first line is turned away, the others are read on their own. */
  #closeQuoted(): void {
    const open = this.#open
    this.#open = null
    if (open === null) return
    const [first, ...others] = open.lines
    if (first !== undefined) this.#rejectQuote(first.text, first.line)
    for (const other of others) this.line(other.text, other.line, other.terminated, false)
  }

  #note(text: string, line: number): void {
    this.#tools.tally.note(line, text)
    const { unit: token, date, start } = readNote(text)
    if (date !== null) this.#times?.setDay(date)
    if (start !== null && this.#sawRow) this.#restart(start)
    const unit = this.#noteUnit(token, line)
    if (unit === null) return
    const before = this.noteUnit
    this.noteUnit = unit
    this.#noteLine = line
    if (this.block === null) return
    this.#makeBlock()
    if (!this.#sawRow || before === null || before.factor === unit.factor) return
    this.remarks.push({
      kind: 'unit-change',
      text: `From line ${line} on the values are in ${unit.token}, before it in ${before.token}. Each is read in its own.`,
      line,
      channel: null,
      atMs: this.#lastMs,
      count: 1,
    })
  }

  /** A new start inside a file that counts seconds. One that cannot be is asked about with its first row. */
  #restart(text: string): void {
    const { startFormat, zone } = this.#tools.dialect
    if (this.#tools.dialect.timeFormat !== 'elapsed-s' || startFormat === null || zone === null) return
    const atMs = startInstant(text, startFormat, zone)
    this.#times?.restart(atMs >= EARLIEST_MS ? { atMs, reconstructed: false } : null)
  }

  /** Unit of a line of metadata. One that tells no absolute quantity is asked about. */
  #noteUnit(token: string | null, line: number): Unit | null {
    if (token === null) return null
    const reading = readUnit(token)
    if (reading.kind === 'unit') return reading.unit
    if (reading.kind === 'none') return null
    const said = this.#unitWords.meaning(token)
    if (said === null) this.#unitWords.ask(token, 'pressure', { line, column: 1 }, [])
    return said === 'leave-out' ? null : said
  }

  #header(fields: string[], line: number): void {
    const { tally, book, profile, sink } = this.#tools
    tally.add('header')
    const before = this.block
    const { columns } = readHeader(fields, book, profile)
    const further = before !== null && !this.#sawRow
    this.#headerColumns = further ? joinHeaders(this.#headerColumns, columns) : columns
    if (!further) this.#unitRowUnits = null
    this.#headerLine = line
    this.#makeBlock()
    if (further || before === null || this.block === null) return
    const reordered = isReordered(before, this.block)
    this.restarts.push({ line, reordered })
    this.remarks.push({
      kind: 'restart',
      text: reordered
        ? `The logger started again at line ${line} and writes its columns in another order since. They are taken by name.`
        : `The logger started again at line ${line}.`,
      line,
      channel: null,
      atMs: this.#lastMs ?? sink.lastMs,
      count: 1,
    })
  }

  #unitRow(fields: string[]): void {
    this.#tools.tally.add('header')
    this.#unitRowUnits = fields.map((field) => {
      const reading = readUnit(field.trim().replace(/^[[(](.*)[\])]$/, '$1'))
      return reading.kind === 'unit' ? reading.unit : null
    })
    this.#makeBlock()
  }

  #makeBlock(): void {
    const unitRow = this.#unitRowUnits
    const { book, profile, sink, questions, dialect } = this.#tools
    const block = makeBlock(dialect.layout, this.#headerColumns, {
      book,
      profile,
      sink,
      noteUnit: this.noteUnit,
      answeredUnits:
        profile.unit === null ? [unitOf(questions.answer('unit'))].filter((unit) => unit !== null) : [],
      doubtful: (token, column, quantity) => this.#doubtfulUnit(token, column, quantity ?? 'pressure'),
      unfit: (name, column, unit, quantity) => this.#unfitUnit(name, column, unit, quantity),
      unitRow,
      oneOf: (name, positions) => this.#oneOf(name, positions),
      answerFor: this.#targets,
    })
    this.block = block
    if (unitRow !== null) this.unitFrom = 'unit-row'
    else if (this.#headerColumns.some(({ unit }) => unit.kind === 'unit')) this.unitFrom = 'header'
    else if (block.unitAt !== -1) this.unitFrom = 'column'
    else if (this.noteUnit !== null) this.unitFrom = 'note'
    else this.unitFrom = profile.unit === null ? null : 'profile'
    this.#namesPending = true
    this.#checkUnit(block)
    for (const column of block.wide) if (column.unit !== null) column.unit = this.#settleUnit(column.unit)
    if (block.unit !== null) block.unit = this.#settleUnit(block.unit)
  }

  /** Asks about names that the register lacks; only when rows come, since a further header row may say more. */
  #askNames(block: Block): void {
    this.#namesPending = false
    const { questions, book } = this.#tools
    for (const { name, position } of block.unknown)
      questions.ask(`unknown-channel:${name}`, () => channelQuestion(name, this.#headerLine, position, book))
  }

  /** Which of several columns of one name counts. */
  #oneOf(name: string, positions: readonly number[]): number | null {
    const { questions } = this.#tools
    const id = `same-name:${name}`
    const answer = questions.answer(id)
    if (answer !== null) return positions.find((position) => String(position) === answer) ?? null
    const column = positions[1] ?? null
    questions.ask(id, () =>
      question({
        id,
        kind: 'same-name',
        blocking: false,
        line: this.#headerLine,
        column,
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
    return null
  }

  #doubtfulUnit(token: string, column: number, quantity: Quantity): Unit | 'leave-out' | null {
    const said = this.#unitWords.meaning(token)
    if (said !== null) return said
    const name = this.#headerColumns[column - 1]?.name ?? ''
    const samples = unitSamples(this.#tools.dialect.rows, column - 1, () => name, this.numbers)
    this.#unitWords.ask(token, quantity, { line: this.#headerLine, column }, samples)
    return null
  }

  #unfitUnit(name: string, column: number, unit: Unit, quantity: Quantity): void {
    const { questions } = this.#tools
    const id = `unfit-unit:${name}`
    if (questions.answer(id) === 'leave-out') return
    questions.ask(id, () =>
      question({
        id,
        kind: 'unit',
        blocking: false,
        line: this.#headerLine,
        column,
        text: `“${name}” is written in ${unit.token}, and its channel measures ${QUANTITIES[quantity].label.toLowerCase()}. The column is left out: how one follows from the other is not known here.`,
        found: `the unit “${unit.token}”`,
        expected: `a unit of ${QUANTITIES[quantity].label.toLowerCase()} such as ${unitsOf(quantity)[0]?.token ?? 'none'}`,
        mend: 'Let the logger write the converted value, or have an engineer register a channel that measures what is written.',
        choices: [choice('leave-out', 'leave the column out')],
      }),
    )
  }

  #checkUnit(block: Block): void {
    const { dialect, profile, questions } = this.#tools
    const column =
      block.wide.find(({ unit }) => unit?.quantity === 'pressure') ??
      block.wide.find(({ unit }) => unit !== null)
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
  #judge(): Refusal | null {
    const { dialect, book, profile } = this.#tools
    const block = this.block
    if (block === null) return null
    const unknown = block.unknown[0]
    if (block.wide.length === 0 && block.repeated.length > 0) return null
    // Before anything is confirmed about a source, names that the register lacks are asked about one by one.
    if (
      profile.layout === null &&
      profile.columns.length === 0 &&
      (unknown === undefined || book.names().length > 0)
    )
      return refuseWithoutUnit(block, dialect, this.#tools)
    if (block.layout === 'wide' && block.wide.length === 0)
      return this.#noKnownChannel(unknown?.name ?? '', this.#headerLine, unknown?.position ?? 1)
    if (block.layout === 'long') {
      const names = dialect.rows.map(({ fields, line }) => ({
        name: (fields[block.channelAt] ?? '').trim(),
        line,
      }))
      const known = names.some(
        ({ name }) => !book.closed || book.isKnown(name) || this.#targets(name) !== null,
      )
      const first = names[0]
      if (!known && first !== undefined)
        return this.#noKnownChannel(first.name, first.line, block.channelAt + 1)
    }
    return refuseWithoutUnit(block, dialect, this.#tools)
  }

  #noKnownChannel(name: string, line: number, column: number): Refusal {
    const names = this.#tools.book.names()
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

  #row(row: Row, terminated: boolean): void {
    const { tally, dialect } = this.#tools
    const { block, line, text } = row
    if (this.#namesPending) this.#askNames(block)
    if (!this.#sawRow) this.refusal = this.#judge()
    this.#sawRow = true
    if (this.refusal !== null) {
      tally.skip('refused')
      return
    }
    if (this.#times === null || this.#tools.questions.isBlocked()) {
      tally.skip('unanswered')
      return
    }
    if (!terminated && isCutRow(row.fields, block)) {
      this.#reject(
        line,
        text,
        'partial-last-line',
        'a last line that stops in the middle',
        `${block.fieldCount} whole fields and a line end`,
      )
      return
    }
    if (dialect.joinsCommas && row.fields.length > block.fieldCount && !this.#joinCommas(row)) return
    const { fields } = row
    const extra = fields.slice(block.fieldCount)
    if (fields.length < block.fieldCount || extra.some((field) => field.trim() !== '')) {
      this.#reject(
        line,
        text,
        'field-count',
        `${fields.length} fields`,
        `${block.fieldCount} fields, as in the header`,
      )
      return
    }
    const dateText = block.dateAt === -1 ? null : (fields[block.dateAt] ?? '')
    const timeText = fields[block.timeAt] ?? ''
    const time = this.#times.read(timeText, dateText, block.timeAt + 1)
    if (time.kind === 'fault' || time.kind === 'nonexistent') {
      if (time.kind === 'nonexistent') this.#askClockChanges(time.wallMs, time.fault, line)
      tally.reject(line, text, time.fault)
      return
    }
    if (time.kind === 'reset') {
      this.#release(null)
      const atMs = this.#resets?.read(time.atMs, line, timeText, this.#lastMs) ?? null
      if (atMs === null) tally.reject(line, text, resetFault(timeText, block.timeAt + 1))
      else this.rows.read(row, atMs, MARKS['time-reconstructed'])
      return
    }
    if (time.kind === 'twice') {
      const track = block.layout === 'long' ? (fields[block.channelAt] ?? '') : ''
      this.#held.push({ row, track, wallMs: time.wallMs, first: time.first, second: time.second })
      if (this.#held.length >= MAX_HELD_ROWS) this.#release(null)
      return
    }
    this.#release(time.atMs)
    this.#resets?.close(time.atMs)
    const track = block.layout === 'long' ? (fields[block.channelAt] ?? '') : ''
    const watched = this.#watch.see(track, time.atMs, line)
    const coarse = dialect.coarse ? MARKS['time-coarse'] | MARKS['order-kept'] : 0
    if (dialect.coarse) this.#coarseRows += 1
    const flagged = this.#times.rounded || this.#offsetChanges(this.#times.offset, time.atMs, line)
    this.#lastMs = time.atMs
    this.rows.read(row, time.atMs, time.marks | watched | coarse, flagged)
  }

  /** Whether the offset written in the times changes here, other than the clocks of the site do. Said once. */
  #offsetChanges(offset: number, atMs: number, line: number): boolean {
    const before = this.#offset
    this.#offset = offset
    if (Number.isNaN(before) || Number.isNaN(offset) || offset === before || this.#lastMs === null)
      return false
    const zone = this.#tools.context.siteZone
    if (zone !== null && offsetAt(zone, this.#lastMs) === before && offsetAt(zone, atMs) === offset)
      return false
    if (this.remarks.some(({ kind }) => kind === 'offset-change')) return true
    this.remarks.push({
      kind: 'offset-change',
      text: `The offset from UTC in the times changes at line ${line}. Each time counts as it is written.`,
      line,
      channel: null,
      atMs,
      count: 1,
    })
    return true
  }

  /** A time that the clocks of the zone leave out: the clock of the logger probably does not change. */
  #askClockChanges(wallMs: number, fault: Fault, line: number): void {
    const { questions, dialect } = this.#tools
    const zone = dialect.zone?.zone ?? 'UTC'
    if (questions.answer('clock-changes') !== null) return
    const winter = offsetText(offsetAt(zone, wallMs - 86_400_000))
    questions.ask('clock-changes', () =>
      question({
        ...fault,
        code: 'clock-changes',
        id: 'clock-changes',
        kind: 'zone',
        blocking: false,
        line,
        text: `The file has times that ${zone} leaves out when its clocks go forward. Does the clock of this source follow the clock changes?`,
        mend: 'Ask whoever set the logger up. Until it is said, rows of that hour are left out.',
        choices: [
          choice(winter, `it does not: it stays at ${winter} all year`),
          choice('leave-out', 'it does; leave the rows of that hour out'),
        ],
      }),
    )
  }

  /** Joins the halves of decimal commas. False when the row is turned away. */
  #joinCommas(row: Row): boolean {
    const joined = joinDecimalCommas(row.fields, row.block.fieldCount)
    if (joined?.kind === 'one') {
      row.fields = joined.fields
      return true
    }
    const found = joined === null ? `${row.fields.length} fields` : twoWays(joined.ways)
    const expected = `${row.block.fieldCount} fields in one way only: decimal points, quoted numbers, or semicolons between the fields`
    this.#reject(row.line, row.text, 'field-count', found, expected)
    return false
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
      this.rows.read(entry.row, ambiguous ? entry.first : atMs, ambiguous ? MARKS['time-ambiguous'] : 0)
      this.#lastMs = ambiguous ? entry.second : atMs
    })
    this.remarks.push({
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

  #reject(
    line: number,
    text: string,
    code: 'too-long' | 'damaged' | 'broken-quote' | 'field-count' | 'partial-last-line',
    found: string,
    expected: string,
  ): void {
    const mend =
      code === 'partial-last-line'
        ? 'The logger was cut off while writing. Nothing needs doing; the line is left out.'
        : 'Compare with the lines around it in the original; the rest of the file is read without it.'
    this.#tools.tally.reject(line, text, { code, column: null, found, expected, mend })
  }

  end(): void {
    while (this.#open !== null) this.#closeQuoted()
    this.#release(null)
    this.#watch.end(this.#times?.fullDay === false)
    if (this.#coarseRows > 0)
      this.remarks.push({
        kind: 'coarse-time',
        text: 'Several rows stand under one time. They keep their order and are marked; no time between them is made up.',
        line: null,
        channel: null,
        atMs: null,
        count: this.#coarseRows,
      })
  }
}

function isPlainUnit(column: HeaderColumn | undefined): boolean {
  return column === undefined || column.unit.kind === 'unit' || column.unit.kind === 'none'
}
