import { isUsable, MARKS, QUANTITIES, type Quantity, qualityWord } from '../readings.ts'
import { BATCH_SIZE, DUPLICATE_WINDOW, GAP_PERIODS, MAX_GAPS, MAX_SEQ, STUCK_ROWS } from './limits.ts'
import { SketchBins } from './sketch.ts'
import { detach } from './text.ts'
import type { BatchChannel, ChannelSummary, Gap, ReadingBatch } from './types.ts'

/** One reading on its way out. */
export interface OutReading {
  channel: number
  atMs: number
  value: number
  bound: number
  quality: number
  marks: number
  line: number
  text: string
}

export type EmitResult = 'new' | 'duplicate' | 'conflict'

interface Held {
  value: number
  bound: number
  quality: number
  seq: number
  /** Further readings of the same instant that differ from this one. */
  more: { value: number; bound: number; quality: number }[] | null
}

interface ChannelState {
  summary: ChannelSummary
  /** Readings by instant: those remembered last, and the generation before them. */
  seen: Map<number, Held>
  seenBefore: Map<number, Held>
  bins: SketchBins
  /** Steps back of an energy meter, and the line of the first. */
  meterSteps: number
  meterLine: number
  run: EqualRun
}

/** Equal good values one after the other. */
interface EqualRun {
  value: number
  count: number
  line: number
  /** The longest so far that is worth pointing out. */
  longest: StuckRun | null
}

/** A channel that showed one and the same figure for long. */
export interface StuckRun {
  channel: string
  value: number
  text: string
  count: number
  line: number
  /** Nothing lower stands in the file. */
  lowest: boolean
}

function newBatch(): ReadingBatch {
  return {
    count: 0,
    channel: new Uint16Array(BATCH_SIZE),
    atMs: new Float64Array(BATCH_SIZE),
    seq: new Uint8Array(BATCH_SIZE),
    value: new Float64Array(BATCH_SIZE),
    bound: new Float64Array(BATCH_SIZE),
    quality: new Uint8Array(BATCH_SIZE),
    marks: new Uint8Array(BATCH_SIZE),
    line: new Uint32Array(BATCH_SIZE),
  }
}

function same(a: { value: number; bound: number; quality: number }, b: OutReading): boolean {
  return Object.is(a.value, b.value) && Object.is(a.bound, b.bound) && a.quality === b.quality
}

/** Collects readings into batches, drops exact repeats, keeps differing ones apart, and sums up each channel. */
export class ReadingSink {
  readonly channels: BatchChannel[] = []
  readonly gaps: Gap[] = []
  gapTotal = 0
  firstMs: number | null = null
  lastMs: number | null = null
  total = 0
  marked = 0
  duplicates = 0
  conflicts = 0
  periodMs: number | null = null
  readonly #states: ChannelState[] = []
  readonly #byName = new Map<string, number>()
  readonly #onBatch: (batch: ReadingBatch) => void
  #batch = newBatch()
  #remembered = 0

  constructor(onBatch: (batch: ReadingBatch) => void) {
    this.#onBatch = onBatch
  }

  /** Index of a channel, registering it at its first appearance. */
  channel(name: string, quantity: Quantity): number {
    const known = this.#byName.get(name)
    if (known !== undefined) return known
    const index = this.channels.length
    this.channels.push({ name, quantity })
    this.#byName.set(name, index)
    this.#states.push({
      summary: {
        name,
        quantity,
        count: 0,
        firstMs: null,
        lastMs: null,
        firstText: '',
        lastText: '',
        min: null,
        minMs: null,
        max: null,
        maxMs: null,
        last: null,
        byQuality: {},
        marked: 0,
        duplicates: 0,
        conflicts: 0,
        sketch: null,
      },
      seen: new Map(),
      seenBefore: new Map(),
      bins: new SketchBins(this.periodMs ?? 60_000),
      meterSteps: 0,
      meterLine: 0,
      run: { value: Number.NaN, count: 0, line: 0, longest: null },
    })
    return index
  }

  /** Hands a reading on. Exact repeats go no further, unless their time is ambiguous: then they may be two hours. */
  emit(reading: OutReading): EmitResult {
    const state = this.#states[reading.channel]
    if (state === undefined) throw new RangeError(`No channel has the index ${reading.channel}`)
    // Rows mostly come in order: what is later than everything before cannot have been seen.
    const { lastMs } = state.summary
    const later = lastMs === null || reading.atMs > lastMs
    const held = later ? undefined : (state.seen.get(reading.atMs) ?? state.seenBefore.get(reading.atMs))
    if (held === undefined) {
      this.#remember(state, reading)
      this.#append(state, reading, 0)
      return 'new'
    }
    if ((reading.marks & MARKS['order-kept']) !== 0 && held.seq < MAX_SEQ) {
      held.seq += 1
      this.#append(state, reading, held.seq)
      return 'new'
    }
    const ambiguous = (reading.marks & MARKS['time-ambiguous']) !== 0
    const repeats = same(held, reading) || (held.more?.some((other) => same(other, reading)) ?? false)
    if ((repeats && !ambiguous) || held.seq >= MAX_SEQ) {
      state.summary.duplicates += 1
      this.duplicates += 1
      return 'duplicate'
    }
    held.seq += 1
    held.more ??= []
    held.more.push({ value: reading.value, bound: reading.bound, quality: reading.quality })
    state.summary.conflicts += 1
    this.conflicts += 1
    this.#markEarlier(reading)
    this.#append(state, { ...reading, marks: reading.marks | MARKS.conflict }, held.seq)
    return 'conflict'
  }

  /** Marks the earlier readings of this instant that have not been handed out yet; storing does the others. */
  #markEarlier(reading: OutReading): void {
    const batch = this.#batch
    for (let i = batch.count - 1; i >= 0; i -= 1) {
      if (batch.channel[i] !== reading.channel || batch.atMs[i] !== reading.atMs) continue
      batch.marks[i] = (batch.marks[i] as number) | MARKS.conflict
    }
  }

  #remember(state: ChannelState, reading: OutReading): void {
    state.seen.set(reading.atMs, {
      value: reading.value,
      bound: reading.bound,
      quality: reading.quality,
      seq: 0,
      more: null,
    })
    this.#remembered += 1
    if (this.#remembered < DUPLICATE_WINDOW / 2) return
    // Whole generations are forgotten: taking single entries out of a large map, oldest first, is slow.
    for (const each of this.#states) {
      each.seenBefore = each.seen
      each.seen = new Map()
    }
    this.#remembered = 0
  }

  #append(state: ChannelState, reading: OutReading, seq: number): void {
    const batch = this.#batch
    const i = batch.count
    batch.channel[i] = reading.channel
    batch.atMs[i] = reading.atMs
    batch.seq[i] = seq
    batch.value[i] = reading.value
    batch.bound[i] = reading.bound
    batch.quality[i] = reading.quality
    batch.marks[i] = reading.marks
    batch.line[i] = reading.line
    batch.count = i + 1
    this.total += 1
    if (reading.marks !== 0) this.marked += 1
    this.#sumUp(state, reading)
    if (batch.count === BATCH_SIZE) this.flush()
  }

  #sumUp(state: ChannelState, reading: OutReading): void {
    const { summary } = state
    const { atMs, value, line } = reading
    const word = qualityWord(reading.quality)
    if (
      summary.lastMs !== null &&
      this.periodMs !== null &&
      atMs - summary.lastMs > GAP_PERIODS * this.periodMs
    ) {
      this.gapTotal += 1
      if (this.gaps.length < MAX_GAPS)
        this.gaps.push({ channel: summary.name, fromMs: summary.lastMs, toMs: atMs, line })
    }
    summary.count += 1
    summary.byQuality[word] = (summary.byQuality[word] ?? 0) + 1
    if (reading.marks !== 0) summary.marked += 1
    if (summary.firstMs === null || atMs < summary.firstMs) {
      summary.firstMs = atMs
      summary.firstText = detach(reading.text)
    }
    if (summary.lastMs === null || atMs >= summary.lastMs) {
      if (summary.quantity === 'energy' && summary.last !== null && value < summary.last) {
        state.meterSteps += 1
        if (state.meterSteps === 1) state.meterLine = line
      }
      summary.lastMs = atMs
      summary.lastText = reading.text
      summary.last = Number.isNaN(value) ? null : value
    }
    if (this.firstMs === null || atMs < this.firstMs) this.firstMs = atMs
    if (this.lastMs === null || atMs > this.lastMs) this.lastMs = atMs
    if (Number.isNaN(value) || !isUsable(word, reading.marks)) return
    if (summary.min === null || value < summary.min) {
      summary.min = value
      summary.minMs = atMs
    }
    if (summary.max === null || value > summary.max) {
      summary.max = value
      summary.maxMs = atMs
    }
    state.bins.add(atMs, value)
    if (QUANTITIES[summary.quantity].logarithmic) this.#followRun(state, reading)
  }

  #followRun({ run, summary }: ChannelState, { value, line, text }: OutReading): void {
    if (value !== run.value) {
      run.value = value
      run.count = 1
      run.line = line
      return
    }
    run.count += 1
    if (run.count < STUCK_ROWS || run.count <= (run.longest?.count ?? 0)) return
    if (run.longest?.line === run.line) run.longest.count = run.count
    else
      run.longest = {
        channel: summary.name,
        value,
        text: detach(text.trim()),
        count: run.count,
        line: run.line,
        lowest: false,
      }
  }

  /** Channels that showed one and the same figure for long. */
  stuck(): StuckRun[] {
    return this.#states.flatMap(({ run, summary }) =>
      run.longest === null ? [] : [{ ...run.longest, lowest: run.longest.value === summary.min }],
    )
  }

  /** Energy meters that went back inside the file: they counted over their last figure, or were exchanged. */
  meterRestarts(): { channel: string; count: number; line: number }[] {
    return this.#states.flatMap(({ summary, meterSteps, meterLine }) =>
      meterSteps === 0 ? [] : [{ channel: summary.name, count: meterSteps, line: meterLine }],
    )
  }

  flush(): void {
    if (this.#batch.count === 0) return
    const full = this.#batch
    this.#batch = newBatch()
    this.#onBatch(full)
  }

  summaries(): ChannelSummary[] {
    return this.#states.map(({ summary, bins }) => ({
      ...summary,
      lastText: detach(summary.lastText),
      sketch: bins.result(),
    }))
  }
}
