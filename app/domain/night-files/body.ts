import { MARKS } from '../readings.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import { type Block, namedTargets } from './block.ts'
import { BlockMaker, type UnitOrigin } from './block-maker.ts'
import { CellReader } from './cells.ts'
import type { ChannelBook } from './channel-names.ts'
import { ResetStretches, resetFault } from './clock-reset.ts'
import { ClockWatch } from './clock-watch.ts'
import { joinDecimalCommas, twoWays } from './comma-pairs.ts'
import { Curves } from './curves.ts'
import type { Dialect } from './dialect.ts'
import { splitFields } from './fields.ts'
import { looksLikeHeader, looksLikeUnitRow } from './header.ts'
import { EARLIEST_MS, MAX_HELD_ROWS } from './limits.ts'
import { directiveSeparator, isComment, isFooter, readNote } from './line-kinds.ts'
import { NumberReader } from './numbers.ts'
import { askClockChanges, OffsetWatch, offsetRemark } from './offsets.ts'
import type { QuestionList } from './questions.ts'
import { OpenRecord } from './quoted-lines.ts'
import { resolveRepeatedHour } from './repeated-hour.ts'
import { isCutRow, type Row, RowReader } from './row-reader.ts'
import { RowTimes } from './row-times.ts'
import type { ReadingSink } from './sink.ts'
import { startInstant } from './start-time.ts'
import type { LineTally } from './tally.ts'
import type { ReadContext, Refusal, Remark, Restart } from './types.ts'
import { UnitWords } from './unit-words.ts'
import { WordBook } from './words.ts'

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
  get block(): Block | null {
    return this.#blocks.block
  }
  get unitFrom(): UnitOrigin {
    return this.#blocks.unitFrom
  }
  get unitWritten(): string | null {
    return this.#blocks.unitWritten
  }
  get backSteps(): number {
    return this.#watch.backSteps
  }
  readonly #tools: BodyTools
  readonly #times: RowTimes | null
  readonly numbers: NumberReader
  readonly #resets: ResetStretches | null
  #sawRow = false
  #open: OpenRecord | null = null
  #held: HeldRow[] = []
  #lastMs: number | null = null
  #coarseRows = 0
  readonly #watch: ClockWatch
  readonly #blocks: BlockMaker
  readonly #offsets: OffsetWatch

  constructor(tools: BodyTools) {
    this.#tools = tools
    this.#watch = new ClockWatch(tools.questions)
    this.#offsets = new OffsetWatch(tools.context.siteZone)
    const { dialect, profile, context, questions, sink, tally, book } = tools
    const numbers = new NumberReader({
      decimalMark: dialect.decimalMark,
      thousandsMark: profile.thousandsMark,
      bareExponent: profile.bareExponent,
    })
    const unitWords = new UnitWords(questions, profile.units, context)
    this.numbers = numbers
    const targets = namedTargets(questions, profile)
    const curves = new Curves(profile.curves)
    this.#blocks = new BlockMaker({ ...tools, numbers, unitWords, curves, targets })
    const words = new WordBook({ ...profile.words, ...questions.words() })
    this.rows = new RowReader({
      cells: new CellReader(numbers, words, [...profile.sentinels, ...questions.floors()], (token) =>
        unitWords.meaning(token),
      ),
      unitWords,
      curves,
      startingMs: profile.startingMinutes * 60_000,
      numbers,
      targetFor: targets,
      sink,
      tally,
      questions,
      book,
      decimalMark: dialect.decimalMark,
      nowMs: context.nowMs,
      settleUnit: (unit) => this.#blocks.settleUnit(unit),
    })
    this.#times =
      dialect.timeFormat === null || dialect.zone === null
        ? null
        : new RowTimes(dialect.timeFormat, dialect.decimalMark, dialect.zone, dialect.start)
    this.#resets =
      dialect.zone === null ? null : new ResetStretches(questions, context, dialect.zone, dialect.periodMs)
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
        tally.add('header')
        this.#blocks.unitRow(fields)
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
    const change = this.#blocks.noteUnit(token, line)
    if (!this.#sawRow || change === null) return
    this.remarks.push({
      kind: 'unit-change',
      text: `From line ${line} on the values are in ${change.to.token}, before it in ${change.from.token}. Each is read in its own.`,
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

  #header(fields: string[], line: number): void {
    const { tally, sink } = this.#tools
    tally.add('header')
    const restart = this.#blocks.header(fields, line, this.#sawRow)
    if (restart === null) return
    this.restarts.push(restart)
    this.remarks.push({
      kind: 'restart',
      text: restart.reordered
        ? `The logger started again at line ${line} and writes its columns in another order since. They are taken by name.`
        : `The logger started again at line ${line}.`,
      line,
      channel: null,
      atMs: this.#lastMs ?? sink.lastMs,
      count: 1,
    })
  }

  #row(row: Row, terminated: boolean): void {
    const { tally, dialect, questions } = this.#tools
    const { block, line, text } = row
    this.#blocks.askNames()
    if (!this.#sawRow) this.refusal = this.#blocks.judge()
    this.#sawRow = true
    if (this.refusal !== null) {
      tally.skip('refused')
      return
    }
    if (this.#times === null || questions.isBlocked()) {
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
      if (time.kind === 'nonexistent') askClockChanges(time.wallMs, time.fault, line, dialect.zone, questions)
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
    const change = this.#offsets.see(this.#times.offset, time.atMs)
    if (change === 'first') this.remarks.push(offsetRemark(line, time.atMs))
    const flagged = this.#times.rounded || change !== null
    this.#lastMs = time.atMs
    this.rows.read(row, time.atMs, time.marks | watched | coarse, flagged)
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
