/** The lists of the register: one table a kind, as things stand at an instant. */
import type { DbOrTx } from '../db/client.server.ts'
import { listEquipment } from '../db/queries/register.server.ts'
import { listDatedLimits, listPlacements } from '../db/queries/register-limits.server.ts'
import { listChannels, listFittings, listMaps } from '../db/queries/register-maps.server.ts'
import { listRegisterRows, listSegmentPlaces, type RegisterRow } from '../db/queries/register-rows.server.ts'
import { spanAt } from '../domain/dated-spans.ts'
import { QUANTITIES } from '../domain/readings.ts'
import { LIMIT_KIND_FACTS, LIMIT_KINDS, type PumpSpeeds } from '../domain/register.ts'
import { type EditedKind, KIND_FACTS, type RegisterKind } from '../domain/schemas/register.ts'
import {
  type Cell,
  choiceLabel,
  columns,
  figure,
  instant,
  link,
  NONE,
  pressure,
  type RegisterTable,
  text,
} from './register-cells.server.ts'

type Row = RegisterTable['rows'][number]
type List = Pick<RegisterTable, 'columns' | 'rows'>

/** Everything of a kind, in order, as it stands at an instant. */
export async function listOfKind(db: DbOrTx, kind: RegisterKind, at: Date): Promise<RegisterTable> {
  const { title } = KIND_FACTS[kind]
  return { title, empty: `The register has no ${title.toLowerCase()} yet.`, ...(await LISTS[kind](db, at)) }
}

const LISTS: Record<RegisterKind, (db: DbOrTx, at: Date) => Promise<List>> = {
  segments,
  positions,
  instruments,
  channels,
  pumps,
  valves,
  circuits,
  'supply-sets': supplySets,
  sources,
  limits,
  equipment,
}

function row(key: string | number, ...cells: Cell[]): Row {
  return { key: String(key), cells, replaced: false }
}

function own(kind: EditedKind, thing: RegisterRow): Cell {
  return link(kind, thing.tag)
}

/** Tag of the segment a row belongs to, as a link. */
async function segmentLinks(db: DbOrTx): Promise<(segmentId: unknown) => Cell> {
  const tags = new Map((await listSegmentPlaces(db)).map(({ id, tag }) => [id, tag]))
  return (segmentId) => link('segments', tags.get(Number(segmentId)))
}

async function segments(db: DbOrTx): Promise<List> {
  const rows = await listRegisterRows(db, 'segments')
  return {
    columns: columns(
      'Tag',
      'From, m>',
      'To, m>',
      'Inner diameter, m>',
      'Wall, mm>',
      'Steel',
      'Fired in vacuum',
      'Last bake>',
      'Hydrogen model',
    ),
    rows: rows.map((thing) => {
      const { startM, endM, innerDiameterM, wallM, steel, vacuumFired, lastBakeYear, hydrogenModel } =
        thing.columns
      return row(
        thing.tag,
        own('segments', thing),
        figure(startM),
        figure(endM),
        figure(innerDiameterM),
        figure(Math.round(Number(wallM) * 1e6) / 1e3),
        text(String(steel)),
        text(vacuumFired ? 'yes' : 'no'),
        lastBakeYear === null ? text('never') : text(String(lastBakeYear)),
        choiceLabel('segments', 'hydrogenModel', hydrogenModel),
      )
    }),
  }
}

async function positions(db: DbOrTx, at: Date): Promise<List> {
  const [rows, segmentOf, maps, fittings] = await Promise.all([
    listRegisterRows(db, 'positions'),
    segmentLinks(db),
    listMaps(db, {}),
    listFittings(db, {}),
  ])
  return {
    columns: columns(
      'Tag',
      'Kind',
      'Segment',
      'Chainage, m>',
      'Instrument now',
      'Channels now',
      'Where',
      'Out of use since',
    ),
    rows: rows.map((thing) => {
      const fitted = spanAt(
        fittings.filter(({ positionId }) => positionId === thing.id),
        at,
      )
      const mapped = maps.filter(
        ({ positionId, startsAt, endsAt }) =>
          positionId === thing.id && startsAt <= at && (endsAt === null || endsAt > at),
      )
      return row(
        thing.tag,
        own('positions', thing),
        choiceLabel('positions', 'kind', thing.columns.kind),
        segmentOf(thing.columns.segmentId),
        figure(thing.columns.chainageM),
        link('instruments', fitted?.serial),
        text(mapped.map(({ sourceCode, channel }) => `${sourceCode} ${channel}`).join(', ')),
        text(String(thing.columns.label)),
        instant(thing.columns.retiredAt),
      )
    }),
  }
}

async function instruments(db: DbOrTx, at: Date): Promise<List> {
  const [rows, fittings] = await Promise.all([listRegisterRows(db, 'instruments'), listFittings(db, {})])
  return {
    columns: columns('Serial number', 'Kind', 'Sits at', 'Factor>', 'Calibration ends', 'Certificate'),
    rows: rows.map((thing) => {
      const fitted = spanAt(
        fittings.filter(({ instrumentId }) => instrumentId === thing.id),
        at,
      )
      return row(
        thing.tag,
        own('instruments', thing),
        choiceLabel('instruments', 'kind', thing.columns.kind),
        link('positions', fitted?.position),
        figure(fitted?.factor),
        instant(thing.columns.calibrationDue),
        text(String(thing.columns.certificate)),
      )
    }),
  }
}

async function channels(db: DbOrTx, at: Date): Promise<List> {
  const [rows, maps] = await Promise.all([listChannels(db), listMaps(db, {})])
  return {
    columns: columns('Channel', 'Source', 'Quantity', 'Position now', 'Since', 'Left out since'),
    rows: rows.map((channel) => {
      const mapped = spanAt(
        maps.filter(({ channelId }) => channelId === channel.id),
        at,
      )
      return row(
        channel.id,
        link('channels', channel.name, channel.id),
        link('sources', channel.sourceCode),
        text(QUANTITIES[channel.quantity].label),
        link('positions', mapped?.position),
        instant(mapped?.startsAt),
        instant(channel.ignoredSince),
      )
    }),
  }
}

async function pumps(db: DbOrTx, at: Date): Promise<List> {
  const [rows, placements] = await Promise.all([listRegisterRows(db, 'pumps'), listPlacements(db)])
  return {
    columns: columns(
      'Tag',
      'Kind',
      'Speed N₂, m³/s>',
      'Speed H₂, m³/s>',
      'Lowest pressure>',
      'Works at',
      'Since',
    ),
    rows: rows.map((thing) => {
      const place = spanAt(
        placements.filter(({ pumpId }) => pumpId === thing.id),
        at,
      )
      const speeds = thing.columns.speeds as PumpSpeeds
      return row(
        thing.tag,
        own('pumps', thing),
        choiceLabel('pumps', 'kind', thing.columns.kind),
        figure(speeds.N2),
        figure(speeds.H2),
        pressure(thing.columns.ultimatePa),
        link('segments', place?.segment),
        instant(place?.startsAt),
      )
    }),
  }
}

async function valves(db: DbOrTx): Promise<List> {
  const rows = await listRegisterRows(db, 'valves')
  return {
    columns: columns(
      'Tag',
      'Kind',
      'Chainage, m>',
      'Box',
      'Seat and seal',
      'Limit, °C>',
      'Position in service',
    ),
    rows: rows.map((thing) => {
      const { kind, chainageM, box, seal, limitC, normalPosition } = thing.columns
      return row(
        thing.tag,
        own('valves', thing),
        choiceLabel('valves', 'kind', kind),
        figure(chainageM),
        text(String(box)),
        text(String(seal)),
        figure(limitC),
        text(String(normalPosition)),
      )
    }),
  }
}

async function circuits(db: DbOrTx): Promise<List> {
  const [rows, segmentOf] = await Promise.all([listRegisterRows(db, 'circuits'), segmentLinks(db)])
  return {
    columns: columns('Tag', 'Kind', 'Segment', 'Power, W>', 'Voltage, V>', 'Earthed at'),
    rows: rows.map((thing) => {
      const { kind, segmentId, powerW, volts, earthing } = thing.columns
      return row(
        thing.tag,
        own('circuits', thing),
        choiceLabel('circuits', 'kind', kind),
        segmentOf(segmentId),
        figure(powerW),
        figure(volts),
        text(String(earthing)),
      )
    }),
  }
}

async function supplySets(db: DbOrTx): Promise<List> {
  const rows = await listRegisterRows(db, 'supply-sets')
  return {
    columns: columns('Tag', 'Current, A>', 'Voltage, V>', 'Open circuit, V>', 'Note'),
    rows: rows.map((thing) => {
      const { maxAmps, maxVolts, openCircuitVolts, note } = thing.columns
      return row(
        thing.tag,
        own('supply-sets', thing),
        figure(maxAmps),
        figure(maxVolts),
        figure(openCircuitVolts),
        text(String(note)),
      )
    }),
  }
}

async function sources(db: DbOrTx): Promise<List> {
  const [rows, channelRows] = await Promise.all([listRegisterRows(db, 'sources'), listChannels(db)])
  return {
    columns: columns(
      'Code',
      'Name',
      'File due',
      'Between readings, s>',
      'Channels>',
      'Way of reading, version>',
      'Out of use since',
    ),
    rows: rows.map((thing) => {
      const { name, dueAt, periodSeconds, profileVersion, offSince } = thing.columns
      return row(
        thing.tag,
        own('sources', thing),
        text(String(name)),
        text(String(dueAt)),
        figure(periodSeconds),
        figure(channelRows.filter(({ sourceCode }) => sourceCode === thing.tag).length),
        profileVersion === 0 ? text('not settled') : figure(profileVersion),
        instant(offSince),
      )
    }),
  }
}

async function limits(db: DbOrTx, at: Date): Promise<List> {
  const all = await listDatedLimits(db)
  const rows = LIMIT_KINDS.flatMap((kind) => {
    const ofKind = all.filter((limit) => limit.kind === kind)
    const holding = ofKind.filter(
      ({ startsAt, endsAt }) => startsAt <= at && (endsAt === null || endsAt > at),
    )
    const name = link('limits', LIMIT_KIND_FACTS[kind].label, kind)
    if (holding.length === 0) return [row(kind, name, NONE, text('not set'), NONE, NONE, NONE)]
    return holding.map((limit) =>
      row(
        `${kind} ${limit.id}`,
        name,
        link('segments', limit.segment),
        limit.unit === 'Pa' ? pressure(limit.value) : figure(limit.value, limit.unit),
        instant(limit.startsAt),
        text(limit.setBy),
        text(limit.reason),
      ),
    )
  })
  return { columns: columns('Limit', 'Only for', 'Value>', 'Since', 'Set by', 'Reason'), rows }
}

async function equipment(db: DbOrTx): Promise<List> {
  const rows = await listEquipment(db)
  return {
    columns: columns('Tag', 'Kind', 'Facts', 'Calibration ends'),
    rows: rows.map((thing) =>
      row(thing.tag, text(thing.tag), text(thing.kind), text(thing.facts), instant(thing.calibrationDue)),
    ),
  }
}
