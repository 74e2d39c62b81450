import type { Quantity } from '../readings.ts'
import { channelKey } from '../register.ts'
import type { SourceProfile } from '../schemas/source-profile.ts'
import type { ChannelBook } from './channel-names.ts'
import { mendLabel } from './encoding.ts'
import { looksNumeric } from './numbers.ts'
import { bareStatistic, statisticTail } from './statistics.ts'
import { looksLikeTime } from './time-text.ts'
import type { ColumnReadOut } from './types.ts'
import { readUnit, type UnitReading } from './units.ts'

/** What a header says about one column. */
export interface HeaderColumn {
  role: ColumnReadOut['role']
  /** Text of the header cell, mended and trimmed. */
  inFile: string
  /** Name without the unit. */
  name: string
  unit: UnitReading
  /** Given by the profile. */
  profileUnit: string | null
  profileChannel: string | null | undefined
  quantity: Quantity | null
}

const TIME =
  /^(?:time|zeit|uhrzeit|datum\s*[/+ ]\s*(?:uhr)?zeit|date\s*[/+ _]?\s*time|timestamp|time\s?stamp|zeitstempel|t|epoch.*|elapsed.*|seconds?|secs?|sekunden|heure|horodatage|fecha[ /]hora|hora|utc|(?:local|utc) time|time .*|zeit .*|time_.*|t_.*)$/i
const DATE = /^(?:date|datum|day|tag|jour|fecha)$/i
const CHANNEL =
  /^(?:channel(?: name)?|kanal|sensor|gauge(?: name)?|position|tag|name|signal|voie|canal|messstelle|point)$/i
const VALUE =
  /^(?:value|wert|messwert|reading|pressure|druck|valeur|pression|valor|p|temperature|temperatur)$/i
const UNIT = /^(?:units?|einheit(?:en)?|unit[ée]s?|unidad)$/i
const STATUS = /^(?:status|state|quality|flags?|zustand|état|etat|gauge status)$/i
const COMMENT = /^(?:comments?|remarks?|notes?|bemerkung(?:en)?|kommentare?|operator|remarques?|text)$/i

/** Splits `P1 (mbar)`, `P1 [mbar]`, `P1 / mbar`, `P1, mbar`, `P1_mbar` into name and unit. */
function splitHeaderCell(cell: string): { name: string; unit: UnitReading } {
  const text = mendLabel(cell).trim()
  const bracketed = /^(.*?)\s*[[({]\s*([^\])}]*(?:\([a-z]\))?)\s*[\])}]$/.exec(text)
  if (bracketed !== null) {
    const unit = readUnit(bracketed[2] as string)
    if (unit.kind !== 'none') return { name: (bracketed[1] as string).trim(), unit }
    // A word in brackets may be part of the name (west end), a single letter-and-sign knot is meant as a unit.
    if (/[?\ufffd]/.test(bracketed[2] as string))
      return {
        name: (bracketed[1] as string).trim(),
        unit: { kind: 'doubtful', token: bracketed[2] as string, why: 'a letter was lost in transfer' },
      }
    return { name: text, unit: { kind: 'none' } }
  }
  const tailed = /^(.+?)(?:\s*[/,]\s*|[\s_]+(?:in\s+)?)([^\s_/,]+)$/.exec(text)
  if (tailed !== null) {
    const token = tailed[2] as string
    const unit = readUnit(token)
    // A lone letter at the end (HC 03 A, TC 1 C) is far more often a position than amperes or degrees.
    if (unit.kind === 'unit' && token.length > 1) return { name: (tailed[1] as string).trim(), unit }
    if (unit.kind === 'gauge-pressure') return { name: (tailed[1] as string).trim(), unit }
  }
  // `P1 (mbar) max`: the unit stands before the word that says which value of a stretch of time it is.
  const tail = statisticTail(text)
  if (tail !== null) {
    const inner = splitHeaderCell(tail.rest)
    if (inner.unit.kind !== 'none') return { name: `${inner.name} ${tail.word}`, unit: inner.unit }
  }
  return { name: text, unit: { kind: 'none' } }
}

function roleOf(name: string): ColumnReadOut['role'] | null {
  if (TIME.test(name)) return 'time'
  if (DATE.test(name)) return 'date'
  if (UNIT.test(name)) return 'unit'
  if (STATUS.test(name)) return 'status'
  if (COMMENT.test(name)) return 'comment'
  return null
}

/** Whether a row of cells can be a header: names and no measured values or dates. */
export function looksLikeHeader(fields: readonly string[], book: ChannelBook): boolean {
  let names = 0
  for (const field of fields) {
    const text = field.trim()
    if (text === '') continue
    if (looksLikeTime(text)) return false
    if (looksNumeric(text)) {
      // m/z columns are called 2, 18, 28: whole numbers may be names, measured values rarely are.
      if (!/^\d{1,3}$/.test(text)) return false
      continue
    }
    names += 1
  }
  if (names === 0) return false
  return fields.some((field) => {
    const { name } = splitHeaderCell(field)
    if (book.isKnown(name) || book.isKnown(field.trim())) return true
    return TIME.test(name) || DATE.test(name)
  })
}

/** Whether every named cell is a unit: the second row of a two-row header. */
export function looksLikeUnitRow(fields: readonly string[]): boolean {
  let units = 0
  for (const field of fields) {
    const text = mendLabel(field)
      .trim()
      .replace(/^[[(](.*)[\])]$/, '$1')
    if (text === '' || /^(?:-|s|sec|h|hh:mm:ss|dd\.mm\.yyyy.*|yyyy-mm-dd.*|utc|local)$/i.test(text)) continue
    if (readUnit(text).kind === 'none') return false
    units += 1
  }
  return units > 0
}

/** Whether every named cell says which value of a stretch of time stands under it: a second row of a header. */
export function looksLikeStatisticRow(fields: readonly string[]): boolean {
  const named = fields.slice(1).filter((field) => field.trim() !== '')
  const kinds = named.map(bareStatistic)
  // One word alone in a row may as well head a line of totals.
  return (fields[0] ?? '').trim() === '' && kinds.length > 1 && kinds.every((kind) => kind !== null)
}

/** Whether a row below the header belongs to it, or begins another block. */
export function isFurtherHeader(fields: readonly string[], book: ChannelBook): boolean {
  return looksLikeUnitRow(fields) || looksLikeStatisticRow(fields) || looksLikeHeader(fields, book)
}

/** Adds to the names of columns what a row under them says about the stretch of time. */
export function joinStatistics(above: readonly HeaderColumn[], fields: readonly string[]): HeaderColumn[] {
  return above.map((column, i) => {
    const word = (fields[i] ?? '').trim()
    return word === '' || column.role !== 'channel' ? column : { ...column, name: `${column.name} ${word}` }
  })
}

/** Reads a header row into columns and the layout that follows from them. */
export function readHeader(
  fields: readonly string[],
  book: ChannelBook,
  profile: SourceProfile,
): { layout: 'wide' | 'long'; columns: HeaderColumn[] } {
  const profileByKey = new Map(profile.columns.map((column) => [channelKey(column.inFile), column]))
  const columns = fields.map((field): HeaderColumn => {
    const split = splitHeaderCell(field)
    const whole = mendLabel(field).trim()
    const fromProfile = profileByKey.get(channelKey(whole)) ?? profileByKey.get(channelKey(split.name))
    const known = book.isKnown(whole) ? whole : split.name
    const base = {
      inFile: whole,
      name: known,
      unit: split.unit,
      profileUnit: fromProfile?.unit ?? null,
      profileChannel: fromProfile?.channel,
      quantity: fromProfile?.quantity ?? null,
    }
    if (fromProfile !== undefined)
      return { ...base, role: fromProfile.channel === null ? 'left-out' : 'channel' }
    if (book.isKnown(whole) || book.isKnown(split.name)) return { ...base, role: 'channel' }
    if (whole === '') return { ...base, role: 'left-out' }
    return { ...base, role: roleOf(split.name) ?? 'channel' }
  })
  const channelAt = columns.findIndex(
    (column) => column.role === 'channel' && CHANNEL.test(column.name) && !book.isKnown(column.name),
  )
  const nameless = (column: HeaderColumn) => column.role === 'channel' && !book.isKnown(column.name)
  const plainAt = columns.findIndex((column) => nameless(column) && VALUE.test(column.name))
  // A long file of means calls its value by what it is.
  const valueAt =
    plainAt !== -1
      ? plainAt
      : columns.findIndex(
          (column) => nameless(column) && bareStatistic(column.name)?.endsWith('mean') === true,
        )
  const layout = profile.layout !== 'wide' && channelAt !== -1 && valueAt !== -1 ? 'long' : 'wide'
  if (layout === 'long' && valueAt !== -1) {
    columns.forEach((column, i) => {
      if (i === valueAt) column.role = 'value'
      else if (column.role === 'channel' && i !== channelAt) column.role = 'comment'
    })
  }
  settleTimeColumns(columns)
  return { layout, columns }
}

/** Lays a further header row over the one above it: names that the register knows count, the others stay. */
export function joinHeaders(above: readonly HeaderColumn[], below: readonly HeaderColumn[]): HeaderColumn[] {
  return above.map((column, i) => {
    const other = below[i]
    if (other === undefined || other.inFile === '' || other.role !== 'channel') return column
    return { ...other, unit: other.unit.kind === 'none' ? column.unit : other.unit }
  })
}

/** Columns of a file without a header, in the order that the profile or a person gives. */
export function columnsInOrder(order: readonly string[], profile: SourceProfile): HeaderColumn[] {
  return order.map((name, i): HeaderColumn => {
    const own = profile.columns.find(({ inFile }) => inFile === String(i + 1))
    const role = name === 'time' || name === 'date' ? name : name === '-' ? 'left-out' : 'channel'
    return {
      role,
      inFile: `column ${i + 1}`,
      name,
      unit: { kind: 'none' },
      profileUnit: own?.unit ?? null,
      profileChannel: role === 'channel' ? name : undefined,
      quantity: own?.quantity ?? null,
    }
  })
}

/** Several columns may sound like a time (time, elapsed, UTC): the first counts, a date column joins it. */
function settleTimeColumns(columns: HeaderColumn[]): void {
  const times = columns.filter((column) => column.role === 'time')
  for (const extra of times.slice(1)) extra.role = 'left-out'
  const dates = columns.filter((column) => column.role === 'date')
  for (const extra of dates.slice(1)) extra.role = 'left-out'
  if (times.length === 0 && dates[0] !== undefined) dates[0].role = 'time'
}

/** Index of the column a long file names its channels in; -1 in a wide one. */
export function channelColumn(columns: readonly HeaderColumn[]): number {
  return columns.findIndex((column) => column.role === 'channel')
}
