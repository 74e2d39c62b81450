/**
 * From the readings of a post to readings as they are stored: the very rules by which the cells of a log file become
 * readings, so that it makes no difference which way a value came.
 */
import { type CellFault, CellReader } from './night-files/cells.ts'
import { ChannelBook } from './night-files/channel-names.ts'
import { FUTURE_MS } from './night-files/limits.ts'
import { NumberReader } from './night-files/numbers.ts'
import { ReadingSink } from './night-files/sink.ts'
import {
  type BatchChannel,
  type KnownChannel,
  READER_VERSION,
  type ReadingBatch,
  type ReadOut,
  type Remark,
} from './night-files/types.ts'
import { readUnit, type Unit, unitFits, unitOf } from './night-files/units.ts'
import { WordBook } from './night-files/words.ts'
import { QUANTITIES, type Quality, type Quantity, qualityCode } from './readings.ts'
import { type LiveReading, POST_LIMITS, type PostFault, shown } from './schemas/live-readings.ts'
import type { SourceProfile } from './schemas/source-profile.ts'

const GOOD = qualityCode('good')
const SUSPECT = qualityCode('suspect')
const NAMES_SHOWN = 8

export interface PostRules {
  /** Channels of the source. */
  channels: readonly (KnownChannel & { quantity: Quantity })[]
  /** Words and sentinel numbers of the source; the rest of its profile is about files. */
  profile: Pick<SourceProfile, 'words' | 'sentinels' | 'version' | 'expectedPeriodSeconds'>
  nowMs: number
}

export type ReadPost =
  | { ok: true; readOut: ReadOut; batches: ReadingBatch[]; channels: readonly BatchChannel[] }
  | { ok: false; faults: PostFault[]; total: number }

/**
 * Reads a post. Line n of the result is reading n − 1 of the list.
 *
 * @param bytes size of the post as it came
 */
export function readPost(readings: readonly LiveReading[], rules: PostRules, bytes: number): ReadPost {
  const faults: PostFault[] = []
  let total = 0
  const batches: ReadingBatch[] = []
  const sink = new ReadingSink((batch) => batches.push(batch))
  const book = new ChannelBook(rules.channels)
  const quantities = new Map(rules.channels.map(({ name, quantity }) => [name, quantity]))
  const cells = new CellReader(
    new NumberReader({ decimalMark: '.', thousandsMark: null, bareExponent: false }),
    new WordBook(rules.profile.words),
    rules.profile.sentinels,
  )
  const counts = { flagged: 0, duplicates: 0, leftOut: 0, future: 0, implausible: 0, dates: 0, conflicts: 0 }

  function read(one: LiveReading, index: number): PostFault | null {
    const match = book.match(one.channel)
    if (match.kind !== 'known') return channelFault(index, one.channel, book.names())
    if (match.channel.ignored === true) {
      counts.leftOut += 1
      return null
    }
    const quantity = quantities.get(match.channel.name) as Quantity
    const unit = unitFor(one, quantity)
    if (unit === 'unfit') return unitFault(index, one.unit ?? '', quantity)
    const text = one.value === null ? '' : String(one.value)
    const fault = cells.read(text, quantity, unit)
    if (fault !== null) return cellFault(index, fault, one.value, cells.badUnit)
    if (one.status !== undefined && cells.applyStatus(one.status, quantity) !== null)
      return statusFault(index, one.status)
    let { quality } = cells
    const { doubt } = cells
    const future = one.at > rules.nowMs + FUTURE_MS
    const { fromMs, untilMs } = match.channel
    const outside = one.at < (fromMs ?? -Infinity) || one.at >= (untilMs ?? Infinity)
    if ((future || outside) && quality === GOOD) quality = SUSPECT
    const { value, bound } = cells
    const channel = sink.channel(match.channel.name, quantity)
    const result = sink.emit({
      channel,
      atMs: one.at,
      value,
      bound,
      quality,
      marks: 0,
      line: index + 1,
      text,
    })
    if (result === 'duplicate') {
      counts.duplicates += 1
      return null
    }
    if (future) counts.future += 1
    if (outside) counts.dates += 1
    if (doubt !== null) counts.implausible += 1
    if (result === 'conflict') counts.conflicts += 1
    if (future || outside || doubt !== null || result === 'conflict') counts.flagged += 1
    return null
  }

  for (const [index, one] of readings.entries()) {
    const fault = read(one, index)
    if (fault === null) continue
    total += 1
    if (faults.length < POST_LIMITS.faults) faults.push(fault)
  }
  if (total > 0) return { ok: false, faults, total }
  sink.flush()
  return {
    ok: true,
    batches,
    channels: sink.channels,
    readOut: report(sink, counts, readings.length, rules, bytes),
  }
}

function unitFor(one: LiveReading, quantity: Quantity): Unit | null | 'unfit' {
  if (one.unit === undefined || one.unit.trim() === '') return unitOf(QUANTITIES[quantity].unit)
  const reading = readUnit(one.unit)
  return reading.kind === 'unit' && unitFits(quantity, reading.unit) ? reading.unit : 'unfit'
}

function channelFault(index: number, name: string, known: readonly string[]): PostFault {
  const some = known.slice(0, NAMES_SHOWN).join(', ')
  const more = known.length > NAMES_SHOWN ? ` and ${known.length - NAMES_SHOWN} more` : ''
  return {
    index,
    field: 'channel',
    found: shown(name),
    expected:
      known.length === 0 ? 'a channel of this source; the register has none' : `one of ${some}${more}`,
    mend: 'Correct the name, or have the channel added to the source in the register.',
  }
}

function unitFault(index: number, unit: string, quantity: Quantity): PostFault {
  const { label, unit: own } = QUANTITIES[quantity]
  return {
    index,
    field: 'unit',
    found: shown(unit),
    expected:
      own === '' ? 'no unit: this channel is on or off' : `a unit of ${label.toLowerCase()}, such as ${own}`,
    mend: 'Send the unit in which the value is meant, or leave it out when it is the usual one.',
  }
}

function cellFault(index: number, fault: CellFault, value: LiveReading['value'], badUnit: string): PostFault {
  const base = { index, field: 'value', found: shown(value) }
  if (fault === 'unknown-word') {
    return {
      ...base,
      expected:
        'a number, a bound such as ">1e-2", or a word that the source is known to write (OFF, FAULT …)',
      mend: 'Send the number, or have the word added to the profile of the source.',
    }
  }
  if (fault === 'unknown-unit') {
    return {
      ...base,
      expected: `a number; ${shown(badUnit)} is no unit of this channel`,
      mend: 'Send the bare number and put the unit into the field unit.',
    }
  }
  return {
    ...base,
    expected: 'a number with a decimal point, for an on-or-off channel 0 or 1',
    mend: 'Send the value as a JSON number.',
  }
}

function statusFault(index: number, status: string): PostFault {
  return {
    index,
    field: 'status',
    found: shown(status),
    expected: 'OK, or a word that the source is known to write (OFF, STARTING, FAULT …)',
    mend: 'Correct the word, or have it added to the profile of the source.',
  }
}

interface Counts {
  flagged: number
  duplicates: number
  leftOut: number
  future: number
  implausible: number
  dates: number
  conflicts: number
}

function report(sink: ReadingSink, counts: Counts, total: number, rules: PostRules, bytes: number): ReadOut {
  const skipped = counts.duplicates + counts.leftOut
  const byQuality: Partial<Record<Quality, number>> = {}
  const channels = sink.summaries()
  for (const channel of channels) {
    for (const [quality, count] of Object.entries(channel.byQuality) as [Quality, number][])
      byQuality[quality] = (byQuality[quality] ?? 0) + count
  }
  return {
    readerVersion: READER_VERSION,
    profileVersion: rules.profile.version,
    state: 'readable',
    refusal: null,
    bytes,
    dialect: {
      encoding: 'utf-8',
      separator: null,
      decimalMark: '.',
      layout: null,
      timeFormat: null,
      zone: null,
      unit: null,
      unitFrom: null,
      lineEnds: { crlf: 0, lf: 0, cr: 0, crcrlf: 0 },
    },
    lines: {
      header: 0,
      directive: 0,
      note: 0,
      accepted: total - counts.flagged - skipped,
      flagged: counts.flagged,
      skipped,
      total,
      counted: total,
      skippedBy: {
        ...(counts.duplicates > 0 ? { duplicate: counts.duplicates } : {}),
        ...(counts.leftOut > 0 ? { 'left-out': counts.leftOut } : {}),
      },
    },
    readings: { total: sink.total, byQuality, marked: sink.marked, duplicates: sink.duplicates },
    firstMs: sink.firstMs,
    lastMs: sink.lastMs,
    periodSeconds: rules.profile.expectedPeriodSeconds,
    columns: [],
    channels,
    gaps: [],
    gapTotal: 0,
    restarts: [],
    remarks: remarks(counts),
    questions: [],
    rejected: [],
    rejectedTotal: 0,
    notes: [],
    answers: [],
  }
}

function remarks(counts: Counts): Remark[] {
  const remark = (kind: Remark['kind'], count: number, text: string): Remark[] =>
    count === 0 ? [] : [{ kind, text, line: null, channel: null, atMs: null, count }]
  const many = (count: number) => (count === 1 ? 'One reading' : `${count} readings`)
  return [
    ...remark(
      'future-times',
      counts.future,
      `${many(counts.future)} dated ahead of the clock, stored as suspect.`,
    ),
    ...remark(
      'outside-dates',
      counts.dates,
      `${many(counts.dates)} outside the dates of the channel in the register, stored as suspect.`,
    ),
    ...remark(
      'outside-ceiling',
      counts.implausible,
      `${many(counts.implausible)} with a value that cannot be taken as measured, stored as suspect or as a fault.`,
    ),
    ...remark(
      'conflicts',
      counts.conflicts,
      `${many(counts.conflicts)} unlike another of the same channel and instant; all are kept and marked.`,
    ),
  ]
}
