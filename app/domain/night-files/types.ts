import type { Quality, Quantity } from '../readings.ts'
import type { Separator, TimeFormat } from '../schemas/source-profile.ts'

/** Version of the reading rules; kept with every import, since a later version may read the same bytes otherwise. */
export const READER_VERSION = 3

/** One channel of the source as the register knows it. */
export interface KnownChannel {
  name: string
  /** null: taken from the unit in the file. */
  quantity: Quantity | null
  /** Left out of every file from now on. */
  ignored?: boolean
  /** Readings before or from these instants on do not belong to the channel. */
  fromMs?: number | null
  untilMs?: number | null
}

/** An answer to a question; it holds for this file. */
export interface Answer {
  /** Id of the question. */
  id: string
  /** `value` of the choice taken, or the text typed where the question allows one. */
  choice: string
  /** The question as it was asked, since an answered one is asked no more. */
  text?: string
  found?: string
  /** The choice in the words of the list; absent where a time was typed. */
  label?: string
  /** Who answered, and when (ISO 8601). */
  by?: string
  at?: string
}

/** What the reader may know besides the file and the profile. Nothing in here is a guess about the file. */
export interface ReadContext {
  /** The product clock: a time more than five minutes after it is in the future. */
  nowMs: number
  /** Zone proposed when the file has local times and the profile no zone. Never applied by itself. */
  siteZone: string | null
  /** null: the source has no channels registered yet, every name is taken as it stands. */
  channels: readonly KnownChannel[] | null
  fileName?: string
  /** Size the sender announced, when it did. */
  statedBytes?: number | null
  answers?: readonly Answer[]
  /** Last instant of the file of this source that was taken in before; proposed where a file has lost its clock. */
  previousEndMs?: number | null
  /** What channels showed last, in the unit of their quantity; shown beside the readings of a doubtful unit. */
  lastKnown?: Readonly<Record<string, { value: number; atMs: number }>>
}

/**
 * Readings in columns, row i of every array being one reading. The arrays are fresh for every batch and belong to
 * the receiver; only the first `count` entries are filled.
 */
export interface ReadingBatch {
  count: number
  /** Index into `NightFileReader.channels`. */
  channel: Uint16Array
  /** Instant in ms since 1970 UTC. */
  atMs: Float64Array
  /** 0 for the first reading of a channel at an instant, 1, 2 … for differing ones of the same instant. */
  seq: Uint8Array
  /** Value in the unit of the channel's quantity (Pa, °C, A …); NaN means no value. */
  value: Float64Array
  /** Limit of an over- or under-range reading, same unit; NaN means none. */
  bound: Float64Array
  /** `qualityCode` of readings.ts. */
  quality: Uint8Array
  /** Bits of `MARKS` in readings.ts. */
  marks: Uint8Array
  /** Line in the file, counted from 1. */
  line: Uint32Array
}

export interface BatchChannel {
  /** Raw channel name: the registered spelling when it is known. */
  name: string
  quantity: Quantity
}

export interface NightFileReader {
  /** Channels met so far, in the order of the indices used by the batches. Only ever grows. */
  readonly channels: readonly BatchChannel[]
  /** Lines seen so far, for a progress display. */
  readonly linesSeen: number
  readonly bytesSeen: number
  push(chunk: Uint8Array): void
  end(): ReadOut
}

export type LineOutcome = 'header' | 'directive' | 'note' | 'accepted' | 'flagged' | 'skipped'

export type SkipReason =
  | 'refused'
  | 'unanswered'
  | 'footer'
  | 'duplicate'
  | 'partial-last-line'
  | 'damaged'
  | 'field-count'
  | 'broken-quote'
  | 'unreadable-time'
  | 'nonexistent-time'
  | 'clock-reset'
  | 'unreadable-value'
  | 'unknown-unit'
  | 'no-unit'
  | 'unknown-word'
  | 'unknown-channel'
  | 'left-out'
  | 'too-long'

/** Where something is, what it is, what it should have been, and what a person can do about it. */
export interface Finding {
  code: string
  /** Counted from 1; null when it concerns the whole file. */
  line: number | null
  /** Field of the line, counted from 1; null when it concerns the whole line. */
  column: number | null
  found: string
  expected: string
  mend: string
}

export type RefusalCode =
  | 'empty-file'
  | 'header-only'
  | 'not-a-log'
  | 'binary-file'
  | 'archive'
  | 'spreadsheet-file'
  | 'no-known-channel'
  | 'too-long-line'
  | 'no-rows'
  | 'no-unit'

export interface Refusal extends Finding {
  code: RefusalCode
}

export interface RejectedLine extends Finding {
  code: SkipReason
  line: number
  /** The line as it stands in the file, cut after 300 characters. */
  text: string
  /** False when only this cell was rejected and the rest of the line was read. */
  wholeLine: boolean
}

/** A cell or time of the file under one choice. */
export interface Candidate {
  line: number
  /** Cell or time as written. */
  text: string
  /** What it would mean. */
  meaning: string
}

export interface Choice {
  value: string
  label: string
  candidates: Candidate[]
}

export type QuestionKind =
  | 'unit'
  | 'decimal-mark'
  | 'date-order'
  | 'zone'
  | 'unknown-channel'
  | 'unknown-word'
  | 'start'
  | 'basis'
  | 'floor'
  | 'clock-jump'
  | 'same-name'
  | 'column'
  | 'reading-of'
  | 'averaging'

export interface Question extends Finding {
  /** Stable for the same file: `unit`, `unknown-channel:HC99Z` … */
  id: string
  kind: QuestionKind
  /** A blocking question keeps the whole file from being accepted; the others leave out what they concern. */
  blocking: boolean
  /** One sentence for the screen. */
  text: string
  choices: Choice[]
  /** `time`: besides the choices a time may be typed, `2026-11-02 06:00` on the clock of the source. */
  typed?: 'time'
  /** Cells or lines that wait for the answer. */
  waiting: number
}

export type RemarkKind =
  | 'restart'
  | 'repeated-hour'
  | 'ambiguous-hour'
  | 'channel-stops'
  | 'conflicts'
  | 'future-times'
  | 'outside-ceiling'
  | 'zero-or-negative'
  | 'open-sensor'
  | 'disorder'
  | 'encoding'
  | 'damaged-bytes'
  | 'short-file'
  | 'left-out-columns'
  | 'spaced-exponent'
  | 'meter-restart'
  | 'unit-change'
  | 'stuck'
  | 'offset-change'
  | 'coarse-time'
  | 'outside-dates'
  | 'averaged'
  | 'outside-bounds'

/** Something a person should look at before taking the file in. */
export interface Remark {
  kind: RemarkKind
  text: string
  line: number | null
  channel: string | null
  atMs: number | null
  count: number
}

/** What a column holds of the stretch of time that a row stands for. */
export type StatisticKind = 'lowest' | 'highest' | 'mean' | 'log-mean'

export interface ColumnStatistic {
  /** Registered channel. */
  of: string
  kind: StatisticKind
}

export interface ColumnReadOut {
  /** Position in the file counted from 1. */
  position: number
  inFile: string
  role: 'time' | 'date' | 'channel' | 'value' | 'unit' | 'status' | 'comment' | 'left-out'
  /** Raw channel the column goes to. */
  channel: string | null
  unit: string | null
  /** Set where the column is named after a channel and a lowest, highest or mean value. */
  statistic?: ColumnStatistic
}

/** Lowest and highest usable value in equal steps, for a small plot. */
export interface Sketch {
  fromMs: number
  stepMs: number
  low: (number | null)[]
  high: (number | null)[]
}

export interface ChannelSummary {
  name: string
  quantity: Quantity
  /** Readings handed out. */
  count: number
  firstMs: number | null
  lastMs: number | null
  /** Cell of the first and last reading as written. */
  firstText: string
  lastText: string
  /** Over good readings only. */
  min: number | null
  minMs: number | null
  max: number | null
  maxMs: number | null
  last: number | null
  byQuality: Partial<Record<Quality, number>>
  marked: number
  duplicates: number
  conflicts: number
  sketch: Sketch | null
}

export interface Gap {
  /** null: the whole file. */
  channel: string | null
  fromMs: number
  toMs: number
  line: number
}

export interface Restart {
  line: number
  /** Columns stand in another order than in the block before. */
  reordered: boolean
}

export interface LineCounts {
  header: number
  directive: number
  note: number
  accepted: number
  flagged: number
  skipped: number
  /** Sum of the six. */
  total: number
  /** Lines counted on the bytes by separate code; equal to `total` or the reader throws. */
  counted: number
  skippedBy: Partial<Record<SkipReason, number>>
}

export interface FileDialect {
  encoding: string
  separator: Separator | null
  decimalMark: '.' | ',' | null
  layout: 'wide' | 'long' | null
  timeFormat: TimeFormat | null
  /** IANA name, fixed offset, or `UTC` for epochs; null when not settled. */
  zone: string | null
  /** Unit of the columns that name none of their own. */
  unit: string | null
  unitFrom: 'header' | 'note' | 'unit-row' | 'column' | 'profile' | null
  lineEnds: { crlf: number; lf: number; cr: number; crcrlf: number }
}

export interface ReadOut {
  readerVersion: number
  profileVersion: number
  /** `readable` may be accepted; `needs-answers` holds blocking questions; `refused` is no log we can read. */
  state: 'readable' | 'needs-answers' | 'refused'
  refusal: Refusal | null
  bytes: number
  dialect: FileDialect
  lines: LineCounts
  readings: { total: number; byQuality: Partial<Record<Quality, number>>; marked: number; duplicates: number }
  firstMs: number | null
  lastMs: number | null
  /** Seconds between rows: the profile's, else the commonest step of the head. */
  periodSeconds: number | null
  /** What one reading stands for; null or absent while nobody has said. */
  averaging?: 'momentary' | 'mean' | 'log-mean' | null
  columns: ColumnReadOut[]
  channels: ChannelSummary[]
  gaps: Gap[]
  gapTotal: number
  restarts: Restart[]
  remarks: Remark[]
  questions: Question[]
  /** At most 1000; `rejectedTotal` counts all. */
  rejected: RejectedLine[]
  rejectedTotal: number
  /** At most 200, cut after 300 characters. */
  notes: { line: number; text: string }[]
  /** Answers that this reading rests on. */
  answers: Answer[]
}
