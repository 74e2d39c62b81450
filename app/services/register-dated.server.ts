/** The dated part of a thing's page: channel maps, fittings, places, limits; and what the form that adds one starts from. */
import type { DbOrTx } from '../db/client.server.ts'
import { listClockCorrections } from '../db/queries/clock-corrections.server.ts'
import { listDatedLimits, listPlacements, type Placement } from '../db/queries/register-limits.server.ts'
import {
  type FittingRow,
  listChannels,
  listFittings,
  listMaps,
  type MapRow,
} from '../db/queries/register-maps.server.ts'
import { listRegisterRows, type RegisterRow } from '../db/queries/register-rows.server.ts'
import { offsetWords } from '../domain/clock-correction.ts'
import { spanAt } from '../domain/dated-spans.ts'
import { QUANTITIES } from '../domain/readings.ts'
import { LIMIT_KIND_FACTS, LIMIT_KINDS, type LimitKind } from '../domain/register.ts'
import type { RegisterKind } from '../domain/schemas/register.ts'
import {
  type Cell,
  choiceLabel,
  columns,
  figure,
  instant,
  link,
  pressure,
  type RegisterTable,
  text,
} from './register-cells.server.ts'

/** What a dated form starts from. `seen` goes back with it, so that a stale form is noticed. */
export type DatedForm =
  | { form: 'channel-map'; seen: number; position: string; choices: string[] }
  | { form: 'fitting'; seen: number; serial: string; factor: number; choices: string[] }
  | { form: 'placement'; seen: number; segment: string; offsetM: number | null }
  | { form: 'clock-correction'; seen: number }
  | { form: 'limit'; seen: number; value: number | null; unit: string }

export interface DatedPart {
  /** What the thing is called on its page. */
  tag: string
  facts: { name: string; cell: Cell }[]
  tables: RegisterTable[]
  form: DatedForm | null
}

/** Tables and form of one thing; null when there is no such thing or it has no page. */
export async function readDatedPart(
  db: DbOrTx,
  kind: RegisterKind,
  key: string,
  row: RegisterRow | null,
  at: Date,
): Promise<DatedPart | null> {
  if (kind === 'channels') return channelPart(db, key, at)
  if (kind === 'limits') return limitPart(db, key, at)
  if (row === null) return null
  const part: DatedPart = { tag: row.tag, facts: [], tables: [], form: null }
  if (kind === 'positions') return positionPart(db, part, row, at)
  if (kind === 'instruments') {
    return {
      ...part,
      tables: [
        fittingTable(
          'Where it has been',
          await listFittings(db, { instrumentId: row.id, withReplaced: true }),
        ),
      ],
    }
  }
  if (kind === 'pumps') {
    const placements = await listPlacements(db, { pumpId: row.id })
    const now = spanAt(placements, at)
    const form: DatedForm = {
      form: 'placement',
      seen: row.revision,
      segment: now?.segment ?? '',
      offsetM: now?.offsetM ?? null,
    }
    return { ...part, tables: [placementTable('Where it has worked', placements)], form }
  }
  if (kind === 'segments') return { ...part, tables: await segmentTables(db, row) }
  if (kind === 'sources') return sourcePart(db, part, row)
  return part
}

function newestId(rows: readonly { id: number; replacedAt: Date | null }[]): number {
  return rows
    .filter(({ replacedAt }) => replacedAt === null)
    .reduce((highest, { id }) => Math.max(highest, id), 0)
}

function inForce<Row extends { replacedAt: Date | null }>(rows: readonly Row[]): Row[] {
  return rows.filter(({ replacedAt }) => replacedAt === null)
}

async function channelPart(db: DbOrTx, key: string, at: Date): Promise<DatedPart | null> {
  const [channel] = /^\d{1,15}$/.test(key) ? await listChannels(db, Number(key)) : []
  if (channel === undefined) return null
  const [maps, positions] = await Promise.all([
    listMaps(db, { channelId: channel.id, withReplaced: true }),
    listRegisterRows(db, 'positions'),
  ])
  const choices = positions
    .filter(({ columns: facts }) => facts.quantity === channel.quantity)
    .map(({ tag }) => tag)
  return {
    tag: channel.name,
    facts: [
      { name: 'Source', cell: link('sources', channel.sourceCode) },
      { name: 'Quantity', cell: text(QUANTITIES[channel.quantity].label) },
      { name: 'Unit stored', cell: text(QUANTITIES[channel.quantity].unit) },
      { name: 'Basis', cell: text(channel.basis) },
      { name: 'Left out since', cell: instant(channel.ignoredSince) },
    ],
    tables: [mapTable('Position by date', maps)],
    form: {
      form: 'channel-map',
      seen: newestId(maps),
      position: spanAt(inForce(maps), at)?.position ?? '',
      choices,
    },
  }
}

async function limitPart(db: DbOrTx, key: string, at: Date): Promise<DatedPart | null> {
  if (!(LIMIT_KINDS as readonly string[]).includes(key)) return null
  const kind = key as LimitKind
  const { label, unit } = LIMIT_KIND_FACTS[kind]
  const limits = await listDatedLimits(db, { kind, withReplaced: true })
  const site = spanAt(
    inForce(limits).filter(({ segmentId }) => segmentId === null),
    at,
  )
  const table: RegisterTable = {
    title: 'Values by date',
    columns: columns('Only for', 'Value>', 'From', 'Until', 'Set by', 'Reason', 'Recorded', 'Replaced'),
    rows: limits.map((limit) => ({
      key: String(limit.id),
      replaced: limit.replacedAt !== null,
      cells: [
        link('segments', limit.segment),
        unit === 'Pa' ? pressure(limit.value) : figure(limit.value, limit.unit),
        instant(limit.startsAt),
        instant(limit.endsAt),
        text(limit.setBy),
        text(limit.reason),
        instant(limit.recordedAt),
        instant(limit.replacedAt),
      ],
    })),
    empty: 'No value has been set yet.',
  }
  const form: DatedForm = { form: 'limit', seen: newestId(limits), value: site?.value ?? null, unit }
  return { tag: label, facts: [], tables: [table], form }
}

async function positionPart(db: DbOrTx, part: DatedPart, row: RegisterRow, at: Date): Promise<DatedPart> {
  const [fittings, maps, instruments] = await Promise.all([
    listFittings(db, { positionId: row.id, withReplaced: true }),
    listMaps(db, { positionId: row.id, withReplaced: true }),
    listRegisterRows(db, 'instruments'),
  ])
  const now = spanAt(inForce(fittings), at)
  return {
    ...part,
    tables: [fittingTable('Instruments by date', fittings), mapTable('Channels by date', maps)],
    form: {
      form: 'fitting',
      seen: newestId(fittings),
      serial: now?.serial ?? '',
      factor: now?.factor ?? 1,
      choices: instruments
        .filter(({ columns: facts }) => facts.quantity === row.columns.quantity)
        .map(({ tag }) => tag),
    },
  }
}

async function segmentTables(db: DbOrTx, row: RegisterRow): Promise<RegisterTable[]> {
  const [placements, positions] = await Promise.all([
    listPlacements(db, { segmentId: row.id }),
    listRegisterRows(db, 'positions'),
  ])
  const own = positions.filter(({ columns: facts }) => facts.segmentId === row.id)
  return [
    placementTable('Pumps by date', placements),
    {
      title: 'Positions',
      columns: columns('Tag', 'Kind', 'Chainage, m>', 'Where'),
      rows: own.map((position) => ({
        key: position.tag,
        replaced: false,
        cells: [
          link('positions', position.tag),
          choiceLabel('positions', 'kind', position.columns.kind),
          figure(position.columns.chainageM),
          text(String(position.columns.label)),
        ],
      })),
      empty: 'No position lies on this segment.',
    },
  ]
}

async function sourcePart(db: DbOrTx, part: DatedPart, row: RegisterRow): Promise<DatedPart> {
  const channels = (await listChannels(db)).filter(({ sourceId }) => sourceId === row.id)
  const corrections = await listClockCorrections(db, row.id)
  const version = Number(row.columns.profileVersion)
  return {
    ...part,
    facts: [
      {
        name: 'Way of reading its files',
        cell: version === 0 ? text('not settled') : text(`version ${version}`),
      },
    ],
    tables: [
      {
        title: 'Channels',
        columns: columns('Channel', 'Quantity', 'Left out since'),
        rows: channels.map((channel) => ({
          key: String(channel.id),
          replaced: false,
          cells: [
            link('channels', channel.name, channel.id),
            text(QUANTITIES[channel.quantity].label),
            instant(channel.ignoredSince),
          ],
        })),
        empty: 'This source has no channels yet. They come with its first accepted file.',
      },
      {
        title: 'Corrections of its clock',
        columns: columns(
          'From, by its clock',
          'Until, by its clock',
          'Clock at the start',
          'At the end',
          'Rests on',
          'Recorded by',
          'Recorded',
          'Replaced',
          'Replaced by',
          'Why replaced',
        ),
        rows: corrections.map((one) => ({
          key: String(one.id),
          replaced: one.replacedAt !== null,
          cells: [
            instant(one.startsAt),
            instant(one.endsAt),
            text(offsetWords(one.startMs)),
            text(offsetWords(one.endMs)),
            text(one.basis),
            text(one.recordedBy),
            instant(one.recordedAt),
            instant(one.replacedAt),
            text(one.replacedBy),
            text(one.replaceReason),
          ],
        })),
        empty: 'Its clock has not been corrected: its readings are shown at the times of its files.',
      },
    ],
    form: { form: 'clock-correction', seen: newestId(corrections) },
  }
}

/** What fittings and channel maps say alike: since when, until when, why, by whom, and whether it was replaced. */
const DATED_COLUMNS = ['From', 'Until', 'Reason', 'Recorded by', 'Recorded', 'Replaced'] as const

function datedCells(row: FittingRow | MapRow): Cell[] {
  return [
    instant(row.startsAt),
    instant(row.endsAt),
    text(row.reason),
    text(row.recordedBy),
    instant(row.recordedAt),
    instant(row.replacedAt),
  ]
}

function fittingTable(title: string, fittings: readonly FittingRow[]): RegisterTable {
  return {
    title,
    columns: columns('Instrument', 'Position', 'Factor>', ...DATED_COLUMNS),
    rows: fittings.map((row) => ({
      key: String(row.id),
      replaced: row.replacedAt !== null,
      cells: [
        link('instruments', row.serial),
        link('positions', row.position),
        figure(row.factor),
        ...datedCells(row),
      ],
    })),
    empty: 'Nothing is recorded.',
  }
}

function mapTable(title: string, maps: readonly MapRow[]): RegisterTable {
  return {
    title,
    columns: columns('Channel', 'Source', 'Position', ...DATED_COLUMNS),
    rows: maps.map((row) => ({
      key: String(row.id),
      replaced: row.replacedAt !== null,
      cells: [
        link('channels', row.channel, row.channelId),
        link('sources', row.sourceCode),
        link('positions', row.position),
        ...datedCells(row),
      ],
    })),
    empty: 'Nothing is recorded.',
  }
}

function placementTable(title: string, placements: readonly Placement[]): RegisterTable {
  return {
    title,
    columns: columns('Pump', 'Segment', 'Metres from its start>', 'From', 'Until', 'Reason'),
    rows: placements.map((row) => ({
      key: String(row.id),
      replaced: false,
      cells: [
        link('pumps', row.pump),
        link('segments', row.segment),
        figure(row.offsetM),
        instant(row.startsAt),
        instant(row.endsAt),
        text(row.reason),
      ],
    })),
    empty: 'Nothing is recorded.',
  }
}
