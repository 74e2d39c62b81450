import type { SourceProfile } from '../schemas/source-profile.ts'
import { type Block, namedTargets } from './block.ts'
import { BlockMaker, type UnitOrigin } from './block-maker.ts'
import { CellReader } from './cells.ts'
import type { ChannelBook } from './channel-names.ts'
import { joinDecimalCommas, twoWays } from './comma-pairs.ts'
import { Curves } from './curves.ts'
import type { Dialect } from './dialect.ts'
import { splitFields } from './fields.ts'
import { looksLikeHeader, looksLikeStatisticRow, looksLikeUnitRow } from './header.ts'
import { cutLine, NUL_BYTES, OPEN_QUOTE, TOO_LONG, unclearCommas, wrongFieldCount } from './line-faults.ts'
import { directiveSeparator, isComment, isFooter, readNote } from './line-kinds.ts'
import { NumberReader } from './numbers.ts'
import type { QuestionList } from './questions.ts'
import { OpenRecord } from './quoted-lines.ts'
import { RowClock } from './row-clock.ts'
import { isCutRow, type Row, RowReader } from './row-reader.ts'
import type { ReadingSink } from './sink.ts'
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
    return this.#clock.backSteps
  }
  readonly #tools: BodyTools
  readonly numbers: NumberReader
  #sawRow = false
  #open: OpenRecord | null = null
  readonly #clock: RowClock
  readonly #blocks: BlockMaker

  constructor(tools: BodyTools) {
    this.#tools = tools
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
    this.#clock = new RowClock(tools, this.rows, this.remarks)
  }

  line(text: string, line: number, terminated: boolean, tooLong: boolean): void {
    const { tally, dialect, book } = this.#tools
    if (this.#open !== null && this.#continueQuoted(text, line, terminated, tooLong)) return
    if (tooLong) {
      tally.reject(line, '', TOO_LONG)
      return
    }
    if (text.includes('\u0000')) {
      tally.reject(line, text.replaceAll('\u0000', '␀'), NUL_BYTES)
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
      tally.reject(line, text, OPEN_QUOTE)
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
      if (this.block !== null && !this.#sawRow && looksLikeStatisticRow(fields)) {
        tally.add('header')
        this.#blocks.statisticRow(fields)
        return
      }
    }
    if (this.block === null || (!this.#sawRow && fields.length === 1)) {
      this.#note(text, line)
      return
    }
    this.#row({ fields, text, line, block: this.block }, terminated)
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
    if (first !== undefined) this.#tools.tally.reject(first.line, first.text, OPEN_QUOTE)
    for (const other of others) this.line(other.text, other.line, other.terminated, false)
  }

  #note(text: string, line: number): void {
    this.#tools.tally.note(line, text)
    const { unit: token, date, start } = readNote(text)
    if (date !== null) this.#clock.setDay(date)
    if (start !== null && this.#sawRow) this.#clock.restart(start)
    const change = this.#blocks.noteUnit(token, line)
    if (!this.#sawRow || change === null) return
    this.remarks.push({
      kind: 'unit-change',
      text: `From line ${line} on the values are in ${change.to.token}, before it in ${change.from.token}. Each is read in its own.`,
      line,
      channel: null,
      atMs: this.#clock.lastMs,
      count: 1,
    })
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
      atMs: this.#clock.lastMs ?? sink.lastMs,
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
    if (!this.#clock.isSettled || questions.isBlocked()) {
      tally.skip('unanswered')
      return
    }
    if (!terminated && isCutRow(row.fields, block)) {
      tally.reject(line, text, cutLine(block))
      return
    }
    if (dialect.joinsCommas && row.fields.length > block.fieldCount && !this.#joinCommas(row)) return
    const { fields } = row
    const extra = fields.slice(block.fieldCount)
    if (fields.length < block.fieldCount || extra.some((field) => field.trim() !== '')) {
      tally.reject(line, text, wrongFieldCount(fields, block))
      return
    }
    this.#clock.read(row)
  }

  /** Joins the halves of decimal commas. False when the row is turned away. */
  #joinCommas(row: Row): boolean {
    const joined = joinDecimalCommas(row.fields, row.block.fieldCount)
    if (joined?.kind === 'one') {
      row.fields = joined.fields
      return true
    }
    const found = joined === null ? `${row.fields.length} fields` : twoWays(joined.ways)
    this.#tools.tally.reject(row.line, row.text, unclearCommas(found, row.block))
    return false
  }

  end(): void {
    while (this.#open !== null) this.#closeQuoted()
    this.#clock.end()
  }
}
