import { emptyProfile, type SourceProfile } from '../schemas/source-profile.ts'
import { FileBody } from './body.ts'
import { ChannelBook } from './channel-names.ts'
import { refuseBinary } from './content-kind.ts'
import { type Dialect, settleDialect } from './dialect.ts'
import { type SniffedEncoding, StreamDecoder, sniffEncoding } from './encoding.ts'
import { askFloors } from './floors.ts'
import { HEAD_CHARS, HEAD_LINES, MAX_LINE_CHARS } from './limits.ts'
import { LineCounter, LineSplitter, NulScanner } from './lines.ts'
import { choice, QuestionList, question } from './questions.ts'
import { collectRemarks } from './remarks.ts'
import { ReadingSink } from './sink.ts'
import { askAveraging, averagingOf } from './statistics.ts'
import { LineTally } from './tally.ts'
import {
  type BatchChannel,
  type NightFileReader,
  READER_VERSION,
  type ReadContext,
  type ReadingBatch,
  type ReadOut,
  type Refusal,
  type StatisticKind,
} from './types.ts'

/** Gases that controllers of long tubes are set to (common practice, no source). */
const CORRECTION_GASES = ['H2', 'H2O', 'Ar', 'He'] as const

/** Bytes looked at before encoding and kind of content are settled. */
const SNIFF_BYTES = 4096

interface HeadLine {
  text: string
  line: number
  terminated: boolean
  tooLong: boolean
}

/**
 * A reader of one night file. Push its bytes in pieces of any size; readings come in batches of at most 8192 while
 * they are read, and `end` gives the report. Nothing is stored and nothing is guessed: what a file leaves open comes
 * back as a question, and a file that is no log as a refusal.
 *
 * Values are in SI units (Pa, °C …), instants in ms since 1970 UTC.
 */
export function createNightFileReader(
  profile: SourceProfile | null,
  context: ReadContext,
  onBatch: (batch: ReadingBatch) => void,
): NightFileReader {
  return new Reader(profile ?? emptyProfile(), context, onBatch)
}

/** Reads a whole file from pieces of bytes. */
export async function readNightFile(
  chunks: AsyncIterable<Uint8Array> | Iterable<Uint8Array>,
  profile: SourceProfile | null,
  context: ReadContext,
  onBatch: (batch: ReadingBatch, channels: readonly BatchChannel[]) => void | Promise<void>,
): Promise<ReadOut> {
  let waiting: ReadingBatch[] = []
  const reader = createNightFileReader(profile, context, (batch) => {
    waiting.push(batch)
  })
  const drain = async () => {
    const batches = waiting
    waiting = []
    for (const batch of batches) await onBatch(batch, reader.channels)
  }
  for await (const chunk of chunks) {
    reader.push(chunk)
    if (waiting.length > 0) await drain()
  }
  const readOut = reader.end()
  await drain()
  return readOut
}

class Reader implements NightFileReader {
  linesSeen = 0
  bytesSeen = 0
  readonly #profile: SourceProfile
  readonly #context: ReadContext
  readonly #book: ChannelBook
  readonly #questions: QuestionList
  readonly #sink: ReadingSink
  readonly #tally = new LineTally()
  readonly #nul = new NulScanner()
  readonly #splitter: LineSplitter
  /** Bytes waiting for the encoding to be settled. */
  #firstBytes: Uint8Array[] = []
  #encoding: SniffedEncoding | null = null
  #decoder: StreamDecoder | null = null
  #counter: LineCounter | null = null
  #head: HeadLine[] | null = []
  #headChars = 0
  #dialect: Dialect | null = null
  #body: FileBody | null = null
  #refusal: Refusal | null = null

  constructor(profile: SourceProfile, context: ReadContext, onBatch: (batch: ReadingBatch) => void) {
    this.#profile = profile
    this.#context = context
    this.#book = new ChannelBook(context.channels)
    this.#questions = new QuestionList(context.answers ?? [])
    this.#sink = new ReadingSink(onBatch)
    this.#splitter = new LineSplitter((text, terminated, tooLong) => this.#line(text, terminated, tooLong))
  }

  get channels(): readonly BatchChannel[] {
    return this.#sink.channels
  }

  push(chunk: Uint8Array): void {
    if (chunk.length === 0) return
    const before = this.bytesSeen
    this.bytesSeen += chunk.length
    if (this.#encoding !== null) {
      this.#feed(chunk)
      return
    }
    this.#firstBytes.push(chunk)
    if (before + chunk.length >= SNIFF_BYTES) this.#openText()
  }

  #openText(): void {
    const first = new Uint8Array(this.bytesSeen)
    let at = 0
    for (const piece of this.#firstBytes) {
      first.set(piece, at)
      at += piece.length
    }
    this.#firstBytes = []
    const encoding = sniffEncoding(first)
    this.#encoding = encoding
    this.#decoder = new StreamDecoder(encoding)
    this.#counter = new LineCounter(encoding.label, encoding.byteOrderMark)
    this.#refusal = refuseBinary(first, encoding.label)
    if (this.#refusal !== null) this.#head = null
    this.#feed(first)
  }

  #feed(chunk: Uint8Array): void {
    this.#counter?.push(chunk)
    this.#nul.push(chunk)
    if (this.#decoder !== null) this.#splitter.push(this.#decoder.push(chunk))
  }

  #line(text: string, terminated: boolean, tooLong: boolean): void {
    this.linesSeen += 1
    const line = this.linesSeen
    if (this.#head !== null) {
      if (tooLong) {
        this.#refuseLong(line)
        this.#tally.skip('refused')
        return
      }
      this.#head.push({ text, line, terminated, tooLong })
      this.#headChars += text.length
      if (this.#head.length >= HEAD_LINES || this.#headChars >= HEAD_CHARS) this.#settle()
      return
    }
    if (this.#refusal !== null || this.#body === null) {
      this.#tally.skip('refused')
      return
    }
    this.#body.line(text, line, terminated, tooLong)
  }

  /** A file without line ends is no log; in the middle of one a long line is only left out. */
  #refuseLong(line: number): void {
    this.#refusal = {
      code: 'too-long-line',
      line,
      column: null,
      found: `a line of more than ${MAX_LINE_CHARS} characters`,
      expected: 'short lines, one row of readings each',
      mend: 'Check that the right file was chosen and that its line ends came through the transfer.',
    }
    for (const _ of this.#head ?? []) this.#tally.skip('refused')
    this.#head = null
  }

  #settle(): void {
    const head = this.#head ?? []
    this.#head = null
    if (head.every(({ text }) => text.trim() === '')) {
      this.#refusal = {
        code: 'empty-file',
        line: null,
        column: null,
        found: this.bytesSeen === 0 ? 'a file of 0 bytes' : 'a file with nothing but blank lines',
        expected: 'a header and rows of readings',
        mend: 'Fetch the file again from the logger; this counts as no data received.',
      }
      for (const { text, line } of head) this.#tally.note(line, text)
      return
    }
    const settled = settleDialect(head, this.#profile, this.#context, this.#book, this.#questions)
    if ('code' in settled) {
      this.#refusal = settled
      for (const _ of head) this.#tally.skip('refused')
      return
    }
    this.#dialect = settled
    this.#sink.periodMs = settled.periodMs
    const body = new FileBody({
      dialect: settled,
      profile: this.#profile,
      context: this.#context,
      book: this.#book,
      questions: this.#questions,
      sink: this.#sink,
      tally: this.#tally,
    })
    this.#body = body
    for (const { text, line, terminated, tooLong } of head) body.line(text, line, terminated, tooLong)
  }

  end(): ReadOut {
    if (this.#encoding === null) this.#openText()
    if (this.#decoder !== null) this.#splitter.push(this.#decoder.end())
    this.#splitter.end()
    if (this.#head !== null) this.#settle()
    this.#body?.end()
    this.#sink.flush()
    this.#refusal ??= this.#body?.refusal ?? null
    if (this.#refusal === null && this.#sink.total === 0 && this.#questions.isWaiting())
      this.#questions.blockAll()
    this.#askBasis()
    if (this.#body !== null) askAveraging(...this.#statistics(), this.#profile, this.#questions)
    if (this.#body !== null) askFloors(this.#sink.stuck(), this.#body.numbers, this.#questions)
    const blocked = this.#questions.isBlocked()
    if (this.#refusal === null && !blocked && this.#sink.total === 0) this.#refusal = this.#noRows()
    const counted = this.#counter?.total() ?? 0
    if (this.#tally.total() !== counted)
      throw new Error(`The reader gave ${this.#tally.total()} lines an outcome, the file has ${counted}`)
    return this.#report(counted, blocked)
  }

  /** Whether a controller corrected its pressures for a gas is said nowhere in a file, and changes every one of them. */
  #askBasis(): void {
    const pressures = this.#sink
      .summaries()
      .filter(({ quantity, count }) => quantity === 'pressure' && count > 0)
    const first = pressures[0]
    if (first === undefined || this.#profile.basis !== null || this.#questions.answer('basis') !== null)
      return
    this.#questions.ask('basis', () =>
      question({
        id: 'basis',
        kind: 'basis',
        blocking: false,
        text: 'Are the pressures of this source nitrogen-equivalent, or already corrected for a gas? They are stored as written either way, and never corrected twice.',
        found: `“${first.firstText.trim()}” from ${first.name}, and nothing in the profile about the gas`,
        expected: 'nitrogen-equivalent, or the gas that the controller was set to',
        mend: 'Look at the setting of the gauge controller, or ask whoever set it up.',
        choices: [
          choice('nitrogen-equivalent', 'nitrogen-equivalent, as gauges are calibrated'),
          ...CORRECTION_GASES.map((gas) => choice(`corrected:${gas}`, `corrected for ${gas}`)),
        ],
      }),
    )
  }

  /** Kinds of the columns that give readings, and the names of all columns that hold statistics. */
  #statistics(): [StatisticKind[], string[]] {
    const columns = (this.#body?.block?.columns ?? []).filter(({ statistic }) => statistic !== undefined)
    const kinds = columns.flatMap(({ channel, statistic }) =>
      channel === null || statistic === undefined ? [] : [statistic.kind],
    )
    return [kinds, columns.map(({ inFile }) => inFile)]
  }

  #noRows(): Refusal {
    const first = this.#tally.rejected[0]
    return {
      code: 'no-rows',
      line: first?.line ?? null,
      column: first?.column ?? null,
      found:
        first === undefined
          ? 'no row that gives a reading'
          : `${first.found}, and no row that gives a reading`,
      expected: first?.expected ?? 'at least one row with a time and a value or a word of the gauge',
      mend: first?.mend ?? 'Check that the right file and source were chosen.',
    }
  }

  #report(counted: number, blocked: boolean): ReadOut {
    const sink = this.#sink
    const channels = sink.summaries()
    const byQuality: ReadOut['readings']['byQuality'] = {}
    for (const channel of channels)
      for (const [word, count] of Object.entries(channel.byQuality) as [keyof typeof byQuality, number][])
        byQuality[word] = (byQuality[word] ?? 0) + count
    const encoding = this.#decoder?.label ?? 'utf-8'
    const body = this.#body
    return {
      readerVersion: READER_VERSION,
      profileVersion: this.#profile.version,
      state: this.#refusal !== null ? 'refused' : blocked ? 'needs-answers' : 'readable',
      refusal: this.#refusal,
      bytes: this.bytesSeen,
      dialect: {
        encoding,
        separator: this.#dialect?.separator ?? null,
        decimalMark: this.#dialect?.decimalMark ?? null,
        layout: this.#dialect?.layout ?? null,
        timeFormat: this.#dialect?.timeFormat ?? null,
        zone: this.#dialect?.zone?.zone ?? null,
        unit: body?.unitWritten ?? null,
        unitFrom: body?.unitFrom ?? null,
        lineEnds: { ...this.#splitter.ends },
      },
      lines: this.#tally.counts(counted),
      readings: { total: sink.total, byQuality, marked: sink.marked, duplicates: sink.duplicates },
      firstMs: sink.firstMs,
      lastMs: sink.lastMs,
      periodSeconds: sink.periodMs === null ? null : sink.periodMs / 1000,
      averaging: averagingOf(this.#statistics()[0], this.#profile, this.#questions),
      columns: body?.block?.columns ?? [],
      channels,
      gaps: sink.gaps,
      gapTotal: sink.gapTotal,
      restarts: body?.restarts ?? [],
      remarks: collectRemarks(body, sink, {
        encoding,
        badBytes: this.#decoder?.badBytes ?? false,
        nul: this.#nul,
        bytes: this.bytesSeen,
        statedBytes: this.#context.statedBytes ?? null,
      }),
      questions: this.#questions.list(),
      rejected: this.#tally.rejected,
      rejectedTotal: this.#tally.rejectedTotal,
      notes: this.#tally.notes,
      answers: [...(this.#context.answers ?? [])],
    }
  }
}
