import type { Quality, Quantity } from '../readings.ts'
import type { Separator, TimeFormat } from '../schemas/source-profile.ts'

/** Version of the reading rules; kept with every import, since a later version may read the same bytes otherwise. */
export const READER_VERSION = 1

/** One channel of the source as the register knows it. */
export interface KnownChannel {
  name: string
  /** null: taken from the unit in the file. */
  quantity: Quantity | null
  /** Time span in which the label is in use, in ms since 1970; a reading outside it is kept as suspect. */
  fromMs?: number | null
  untilMs?: number | null
  /** For gauges logged as a voltage: p = 10^((U - voltsAtOnePa) / voltsPerDecade) Pa. */
  curve?: { voltsPerDecade: number; voltsAtOnePa: number } | null
  /** Last stored value (SI) of the position behind this channel, shown beside the candidates of a question. */
  lastKnown?: { valueSi: number; atMs: number } | null
}

export interface Answer {
  /** Id of the question. */
  id: string
  /** `value` of the choice taken; for questions with `freeText`, the text typed. */
  choice: string
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
  /** Answers that hold for this file only (clock anchors, jumps); the others belong in the profile. */
  answers?: readonly Answer[]
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
  /** 0 for the first reading of a channel at an instant, 1, 2 … for conflicting or coarse ones. */
  seq: Uint16Array
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
  /** Whether the head of the file already showed that it cannot be read; the rest is then only counted. */
  readonly refused: boolean
  push(chunk: Uint8Array): void
  end(): ReadOut
}

export const LINE_OUTCOMES = ['header', 'directive', 'note', 'accepted', 'flagged', 'skipped'] as const
export type LineOutcome = (typeof LINE_OUTCOMES)[number]

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
  | 'impossible-time'
  | 'nonexistent-time'
  | 'clock-reset'
  | 'unreadable-value'
  | 'unknown-unit'
  | 'unknown-word'
  | 'unknown-channel'
  | 'before-header'
  | 'left-out'
  | 'too-long'

/** Where something is, what it is, what it should have been, and what a person can do about it. */
export interface Finding {
  code: string
  /** Counted from 1; null when it concerns the whole file. */
  line: number | null
  /** Counted from 1; null when it concerns the whole line. */
  column: number | null
  found: string
  expected: string
  mend: string
}

export interface RejectedLine extends Finding {
  code: SkipReason
  line: number
  /** The line as it stands in the file, cut after 300 characters. */
  text: string
  /** False when only this cell was rejected and the rest of the line was read. */
  wholeLine: boolean
}

export interface Candidate {
  channel: string
  line: number
  /** Cell or time as written. */
  text: string
  /** Value in SI under this choice, or instant in ms for questions about time. */
  valueSi: number | null
  atMs: number | null
  lastKnown: { valueSi: number; atMs: number } | null
}

export interface Choice {
  value: string
  label: string
  candidates: Candidate[]
}

export type QuestionKind =
  | 'unit'
  | 'decimal-mark'
  | 'layout'
  | 'date-order'
  | 'zone'
  | 'spring-gap'
  | 'epoch-unit'
  | 'serial-base'
  | 'start-time'
  | 'half-day'
  | 'columns'
  | 'same-name'
  | 'unknown-channel'
  | 'unknown-word'
  | 'clock-reset'
  | 'clock-jump'
  | 'floor-value'
  | 'voltage-curve'
  | 'cut-short'

export interface Question extends Finding {
  /** Stable for the same file: `unit`, `unit:HC-03A`, `clock-reset:120` … */
  id: string
  kind: QuestionKind
  /** A blocking question keeps the whole file from being accepted; the others leave out what they concern. */
  blocking: boolean
  /** One sentence for the screen. */
  text: string
  choices: Choice[]
  /** Set when any text of the named shape is an answer besides the choices. */
  freeText: 'zone' | 'instant' | 'unit' | 'columns' | 'channel' | null
  /** `profile`: the answer belongs in the source's profile. `file`: it holds for this file only. */
  remember: 'profile' | 'file'
  /** Cells or lines that wait for the answer. */
  waiting: number
  /** Set when a later line of the file settled the question: reading again with this choice needs no person. */
  settledBy: { line: number; choice: string } | null
}

export type RemarkKind =
  | 'restart'
  | 'repeated-hour'
  | 'ambiguous-hour'
  | 'gap'
  | 'channel-stops'
  | 'stuck'
  | 'unit-change'
  | 'offset-change'
  | 'clock-step'
  | 'disorder'
  | 'conflicts'
  | 'coarse-time'
  | 'future-times'
  | 'damaged-bytes'
  | 'encoding'
  | 'departs-from-profile'
  | 'left-out-columns'
  | 'outside-ceiling'
  | 'zero-or-negative'
  | 'label-period'
  | 'reconstructed-time'
  | 'combined-header'
  | 'spaced-exponent'
  | 'formula-text'
  | 'short-file'
  | 'mended-labels'

export interface Remark {
  kind: RemarkKind
  text: string
  line: number | null
  channel: string | null
  atMs: number | null
  count: number
}

export interface ColumnReadOut {
  /** Position in the file counted from 1; 0 for the channels of a long file. */
  position: number
  inFile: string
  role: 'time' | 'date' | 'channel' | 'value' | 'unit' | 'status' | 'comment' | 'left-out'
  /** Raw channel the column goes to. */
  channel: string | null
  unit: string | null
  /** Where the unit comes from. */
  unitFrom: 'header' | 'unit-row' | 'note' | 'column' | 'cell' | 'profile' | null
  quantity: Quantity | null
  firstText: string | null
}

export interface ChannelSummary {
  name: string
  quantity: Quantity
  /** Readings handed out. */
  count: number
  firstMs: number | null
  lastMs: number | null
  /** Over good readings only. */
  min: number | null
  minMs: number | null
  max: number | null
  maxMs: number | null
  byQuality: Partial<Record<Quality, number>>
  marked: number
  duplicates: number
  conflicts: number
  /** Longest run of one unchanged value. */
  longestRun: number
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
  /** Instant of the first row after the header; null when none follows. */
  atMs: number | null
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
  thousandsMark: string | null
  layout: 'wide' | 'long' | null
  timeFormat: TimeFormat | null
  /** IANA name, fixed offset, `in the file`, or `UTC` for epochs; null when not settled. */
  zone: string | null
  lineEnds: { crlf: number; lf: number; cr: number; crcrlf: number }
}

export interface ReadOut {
  readerVersion: number
  profileVersion: number
  /** `readable` may be accepted; `needs-answers` holds blocking questions; `refused` is no log we can read. */
  state: 'readable' | 'needs-answers' | 'refused'
  refusal: Finding | null
  bytes: number
  dialect: FileDialect
  lines: LineCounts
  readings: { total: number; byQuality: Partial<Record<Quality, number>>; marked: number }
  firstMs: number | null
  lastMs: number | null
  /** Seconds between rows: the profile's, else the commonest step of the head. */
  periodSeconds: number | null
  columns: ColumnReadOut[]
  channels: ChannelSummary[]
  gaps: Gap[]
  restarts: Restart[]
  remarks: Remark[]
  questions: Question[]
  /** At most 1000; `rejectedTotal` counts all. */
  rejected: RejectedLine[]
  rejectedTotal: number
  /** At most 200, cut after 300 characters. */
  notes: { line: number; text: string }[]
  /**
   * Marks to add to readings that had already been handed out when a later line showed the need (a conflict far
   * down the file). Apply them to the stored rows of this import.
   */
  laterMarks: { channel: number; atMs: number; seq: number; marks: number }[]
}
