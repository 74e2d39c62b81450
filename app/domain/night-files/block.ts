import type { Quantity } from '../readings.ts'
import { channelKey } from '../register.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import type { ChannelBook } from './channel-names.ts'
import type { Curves } from './curves.ts'
import { channelColumn, type HeaderColumn } from './header.ts'
import type { QuestionList } from './questions.ts'
import type { ReadingSink } from './sink.ts'
import { type OpenReading, readingColumns, statisticOf } from './statistics.ts'
import type { ColumnReadOut, ColumnStatistic } from './types.ts'
import { type Unit, unitFits, unitOf } from './units.ts'

/** One channel of a wide file in one block. */
export interface WideColumn {
  at: number
  channel: number
  quantity: Quantity
  unit: Unit | null
  /** Columns with the lowest and highest value of the stretch of time that a row stands for. */
  bounds?: { at: number; unit: Unit; kind: 'lowest' | 'highest' }[]
}

/** What a header says about the rows under it. */
export interface Block {
  layout: 'wide' | 'long'
  fieldCount: number
  timeAt: number
  /** -1 where there is none. */
  dateAt: number
  channelAt: number
  valueAt: number
  unitAt: number
  statusAt: number
  /** Unit of a long file's rows that name none. */
  unit: Unit | null
  wide: WideColumn[]
  columns: ColumnReadOut[]
  /** Columns whose name the register does not know, with their position counted from 1. */
  unknown: { name: string; position: number }[]
  /** Channels that several columns name, with the positions of these from 1. */
  repeated: { name: string; positions: readonly number[] }[]
  /** Channels of which the file holds statistics only, while nobody has said which of them counts. */
  unsettled: OpenReading[]
}

export interface BlockFacts {
  book: ChannelBook
  profile: SourceProfile
  sink: ReadingSink
  /** Unit of a metadata line. */
  noteUnit: Unit | null
  /** Curves of gauges that write volts. */
  curves: Curves
  /** Units that a person chose for columns without one. */
  answeredUnits: readonly Unit[]
  /** What a doubtful unit of a header stands for; null leaves the column without a unit, and asks. */
  doubtful: (token: string, column: number, quantity: Quantity | null) => Unit | 'leave-out' | null
  /** A column whose unit does not measure what its channel measures. True: it is to be left out. */
  unfit: (name: string, column: number, unit: Unit, quantity: Quantity) => void
  /** Units of a second header row, by column. */
  unitRow: readonly (Unit | null)[] | null
  /** The column (from 1) that counts of several with one name; null for none of them. */
  oneOf: (name: string, positions: readonly number[]) => number | null
  /** Where an unknown name goes by answer: a registered name, `leave-out`, or null while nobody has said. */
  answerFor: (name: string) => string | null
  /** Which column is the reading of a channel that has statistics only, by an answer or the profile. */
  readingColumn: string | null
}

/** Units of the columns that name none, by rank: a metadata line's, an answer's, the profile's. */
function defaultUnits({ noteUnit, answeredUnits, profile }: BlockFacts): Unit[] {
  const own = profile.unitInFile ? null : unitOf(profile.unit)
  return [noteUnit, ...answeredUnits, own].filter((unit) => unit !== null)
}

/** Unit of a column; `leave-out` where its own unit tells nothing, null where there is none. */
function columnUnit(
  column: HeaderColumn,
  i: number,
  quantity: Quantity | null,
  facts: BlockFacts,
  channel: string | null,
): Unit | 'leave-out' | null {
  const { unit } = column
  let own: Unit | 'leave-out' | null = facts.unitRow?.[i] ?? unitOf(column.profileUnit)
  if (unit.kind === 'unit') own = unit.unit
  else if (unit.kind !== 'none') {
    own = facts.doubtful(unit.token, i + 1, quantity)
    // What the file says about its unit is not to be replaced by what others of its kind say.
    if (own === null) return null
  }
  if (own === 'leave-out') return own
  if (own !== null && quantity !== null && !unitFits(quantity, own)) {
    const byCurve = channel === null || quantity !== 'pressure' ? null : facts.curves.unitFor(channel, own)
    if (byCurve !== null) return byCurve
    facts.unfit(column.name, i + 1, own, quantity)
    return 'leave-out'
  }
  if (own !== null) return own
  // A line "unit: mbar" says nothing about a temperature column beside the pressures.
  return defaultUnits(facts).find((one) => quantity === null || unitFits(quantity, one)) ?? null
}

/** Maps the columns of a header to what the rows under it hold. */
export function makeBlock(
  layout: 'wide' | 'long',
  columns: readonly HeaderColumn[],
  facts: BlockFacts,
): Block {
  const at = (role: ColumnReadOut['role']) => columns.findIndex((column) => column.role === role)
  const block: Block = {
    layout,
    fieldCount: columns.length,
    timeAt: at('time'),
    dateAt: at('date'),
    channelAt: layout === 'long' ? channelColumn(columns) : -1,
    valueAt: at('value'),
    unitAt: layout === 'long' ? at('unit') : -1,
    statusAt: layout === 'long' ? at('status') : -1,
    unit: null,
    wide: [],
    columns: [],
    unknown: [],
    repeated: [],
    unsettled: [],
  }
  const valueColumn = columns[block.valueAt]
  const wide = layout === 'wide' ? wideColumns(columns, facts) : null
  const targets = wide?.targets ?? []
  block.unsettled = wide?.open ?? []
  const sameName = repeatedNames(targets)
  if (layout === 'long' && valueColumn !== undefined)
    block.unit = usable(columnUnit(valueColumn, block.valueAt, null, facts, null))
  columns.forEach((column, i) => {
    const shown: ColumnReadOut = {
      position: i + 1,
      inFile: column.inFile,
      role: column.role,
      channel: null,
      unit: null,
    }
    block.columns.push(shown)
    const statistic = wide?.statistics[i] ?? null
    if (statistic !== null) shown.statistic = statistic
    if (column.role === 'value') shown.unit = block.unit?.token ?? null
    if (layout !== 'wide' || column.role !== 'channel') return
    const target = targets[i] ?? null
    if (target === null) {
      block.unknown.push({ name: column.name, position: i + 1 })
      shown.role = 'left-out'
      return
    }
    if (target === 'leave-out') {
      shown.role = 'left-out'
      return
    }
    const positions = sameName.get(target.name) ?? []
    if (positions.length > 1) {
      if (positions[0] === i + 1) block.repeated.push({ name: target.name, positions })
      if (facts.oneOf(target.name, positions) !== i + 1) {
        shown.role = 'left-out'
        return
      }
    }
    const unit = columnUnit(column, i, target.quantity, facts, target.name)
    if (unit === 'leave-out') {
      shown.role = 'left-out'
      return
    }
    const quantity = target.quantity ?? column.quantity ?? unit?.quantity ?? 'pressure'
    const channel = facts.sink.channel(target.name, quantity)
    block.wide.push({ at: i, channel, quantity, unit })
    const volts = unit?.curve === undefined ? null : voltsOf(target.name, facts)
    if (volts !== null) block.wide.push({ at: i, ...volts })
    shown.channel = target.name
    shown.unit = unit?.token ?? null
  })
  if (wide !== null) joinBounds(block, columns, facts)
  return block
}

/** Lays the columns with the lowest and highest values beside the readings that they bound. */
function joinBounds(block: Block, columns: readonly HeaderColumn[], facts: BlockFacts): void {
  block.columns.forEach(({ statistic, channel }, at) => {
    const column = columns[at]
    if (channel !== null || column === undefined || statistic === undefined) return
    const { kind, of } = statistic
    if (kind !== 'lowest' && kind !== 'highest') return
    const reading = block.wide.find(
      (one) => one.quantity !== 'voltage' && facts.sink.channels[one.channel]?.name === of,
    )
    if (reading === undefined || reading.unit === null || reading.unit.curve !== undefined) return
    const own = column.unit.kind === 'unit' ? column.unit.unit : reading.unit
    if (!unitFits(reading.quantity, own)) return
    reading.bounds = [...(reading.bounds ?? []), { at, unit: own, kind }]
  })
}

/** Where the columns of a wide file go, with those that hold the lowest, highest or mean value of a channel. */
function wideColumns(
  columns: readonly HeaderColumn[],
  facts: BlockFacts,
): { targets: Target[]; statistics: (ColumnStatistic | null)[]; open: OpenReading[] } {
  const counts = ({ role }: HeaderColumn) => role === 'channel' || role === 'left-out'
  const plain = columns.map((column) => (counts(column) ? wideTarget(column, facts) : null))
  const statistics = columns.map((column) => (counts(column) ? statisticOf(column.name, facts.book) : null))
  const { chosen, open } = readingColumns(
    columns.map((_, i) => {
      const target = plain[i] ?? null
      return {
        statistic: target === null ? (statistics[i] ?? null) : null,
        given: target === null || target === 'leave-out' ? null : target.name,
      }
    }),
    facts.readingColumn,
  )
  const targets = plain.map((target, i): Target => {
    const statistic = statistics[i] ?? null
    if (target !== null || statistic === null) return target
    return chosen.has(i) ? channelTarget(statistic.of, facts) : 'leave-out'
  })
  return { targets, statistics, open }
}

/** The channel that keeps the volts of a pressure channel, where the register has one. */
export function voltsOf(
  name: string,
  { curves, book, sink }: Pick<BlockFacts, 'curves' | 'book' | 'sink'>,
): Omit<WideColumn, 'at'> | null {
  const match = book.match(curves.voltsChannel(name) ?? '')
  if (match.kind !== 'known' || match.channel.ignored === true || match.channel.quantity !== 'voltage')
    return null
  return {
    channel: sink.channel(match.channel.name, 'voltage'),
    quantity: 'voltage',
    unit: unitOf('V'),
  }
}

function usable(unit: Unit | 'leave-out' | null): Unit | null {
  return unit === 'leave-out' ? null : unit
}

type Target = { name: string; quantity: Quantity | null } | 'leave-out' | null

/** Positions (from 1) of the columns of each channel. */
function repeatedNames(targets: readonly Target[]): Map<string, number[]> {
  const positions = new Map<string, number[]>()
  targets.forEach((target, i) => {
    if (target === null || target === 'leave-out') return
    positions.set(target.name, [...(positions.get(target.name) ?? []), i + 1])
  })
  return positions
}

function wideTarget(column: HeaderColumn, facts: BlockFacts): Target {
  if (column.profileChannel === null) return 'leave-out'
  return channelTarget(column.profileChannel ?? column.name, facts)
}

/** Where readings under a name go: a registered channel, nowhere, or null for a name nobody knows. */
export function channelTarget(name: string, facts: Pick<BlockFacts, 'book' | 'answerFor'>): Target {
  const match = facts.book.match(name)
  if (match.kind === 'known')
    return match.channel.ignored === true
      ? 'leave-out'
      : { name: match.channel.name, quantity: match.channel.quantity }
  if (!facts.book.closed) return { name, quantity: null }
  const answer = facts.answerFor(name)
  if (answer === null) return null
  if (answer === 'leave-out') return 'leave-out'
  const chosen = facts.book.match(answer)
  return chosen.kind === 'known' ? { name: chosen.channel.name, quantity: chosen.channel.quantity } : null
}

/** Whether two headers name the same columns in another order. */
export function isReordered(before: Block, after: Block): boolean {
  const names = (block: Block) => block.columns.map(({ inFile }) => inFile)
  const a = names(before)
  const b = names(after)
  return a.join('\u0000') !== b.join('\u0000')
}

/** Where names that the register lacks go: by an answer about this file, else by the profile of the source. */
export function namedTargets(
  questions: QuestionList,
  profile: SourceProfile,
): (name: string) => string | null {
  const columns = new Map(profile.columns.map(({ inFile, channel }) => [channelKey(inFile), channel]))
  return (name) => {
    const answer = questions.answer(`unknown-channel:${name}`)
    if (answer !== null) return answer
    const channel = columns.get(channelKey(name))
    return channel === undefined ? null : (channel ?? 'leave-out')
  }
}
