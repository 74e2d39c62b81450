import {
  boolean,
  double,
  index,
  int,
  mysqlTable,
  smallint,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import { QUANTITY_NAMES } from '../../domain/readings.ts'
import {
  FEEDERS,
  HEATER_KINDS,
  HYDROGEN_MODELS,
  INSTRUMENT_KINDS,
  LIMIT_KINDS,
  POSITION_KINDS,
  PUMP_KINDS,
  PumpSpeedsSchema,
  VALVE_KINDS,
} from '../../domain/register.ts'
import { SEGMENT_STATE_CODES } from '../../domain/segment-states.ts'
import { id, json, ref, utc } from '../columns.ts'
import { person } from './people.ts'

/** The site: one row. */
export const site = mysqlTable('site', {
  id: id(),
  code: varchar('code', { length: 12 }).notNull(),
  name: varchar('name', { length: 120 }).notNull(),
  timeZone: varchar('time_zone', { length: 64 }).notNull(),
  ambientC: double('ambient_c').notNull(),
})

/** A run of tube with its own chainage: the main line, or a spur that leaves it. */
export const line = mysqlTable(
  'line',
  {
    id: id(),
    code: varchar('code', { length: 20 }).notNull(),
    name: varchar('name', { length: 120 }).notNull(),
    lengthM: double('length_m').notNull(),
    /** Where a spur leaves another line. */
    joinsLineId: ref('joins_line_id'),
    joinsAtM: double('joins_at_m'),
    sortOrder: smallint('sort_order').notNull(),
  },
  (t) => [uniqueIndex('line_code_uq').on(t.code)],
)

/** A length of tube between two gate valves. Lengths in metres, hydrogen content in atoms per cubic metre. */
export const segment = mysqlTable(
  'segment',
  {
    id: id(),
    lineId: ref('line_id')
      .notNull()
      .references(() => line.id),
    tag: varchar('tag', { length: 12 }).notNull(),
    startM: double('start_m').notNull(),
    endM: double('end_m').notNull(),
    innerDiameterM: double('inner_diameter_m').notNull(),
    wallM: double('wall_m').notNull(),
    steel: varchar('steel', { length: 20 }).notNull(),
    vacuumFired: boolean('vacuum_fired').notNull(),
    /** Year of the last completed bake; null means never. */
    lastBakeYear: smallint('last_bake_year'),
    hydrogenModel: varchar('hydrogen_model', { length: 16, enum: HYDROGEN_MODELS }).notNull(),
    /** Mobile hydrogen, atoms/m³, for the diffusion model. */
    hydrogenC0: double('hydrogen_c0'),
    /** Hydrogen outgassing at 20 °C, Pa·m/s, for the low-hydrogen model. */
    hydrogenQ20: double('hydrogen_q20'),
    hydrogenOrigin: varchar('hydrogen_origin', { length: 300 }).notNull(),
    /** Adsorbed water capacity, molecules per square metre. */
    waterCapacity: double('water_capacity').notNull(),
    waterOrigin: varchar('water_origin', { length: 300 }).notNull(),
    bellowsCount: smallint('bellows_count').notNull(),
    bellowsTravelMm: double('bellows_travel_mm').notNull(),
    bellowsRatedMm: double('bellows_rated_mm').notNull(),
    insulationM: double('insulation_m').notNull(),
    insulationWPerMK: double('insulation_w_per_m_k').notNull(),
    /** End-to-end electrical resistance at 20 °C, ohm. */
    resistance20Ohm: double('resistance_20_ohm').notNull(),
    /** The feeder that a bake of this segment draws from; null where nobody has said. */
    feeder: varchar('feeder', { length: 12, enum: FEEDERS }),
    sortOrder: smallint('sort_order').notNull(),
    /** Counts edits, so that a stale form is noticed. */
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('segment_tag_uq').on(t.tag)],
)

/** The state a segment is in, set by a person. One open row (no `endedAt`) a segment. */
export const segmentState = mysqlTable(
  'segment_state',
  {
    id: id(),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    state: varchar('state', { length: 20, enum: SEGMENT_STATE_CODES }).notNull(),
    since: utc('since').notNull(),
    endedAt: utc('ended_at'),
    reason: varchar('reason', { length: 1000 }).notNull(),
    setBy: ref('set_by')
      .notNull()
      .references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
  },
  (t) => [index('segment_state_ix').on(t.segmentId, t.since)],
)

/** A gate, pump-port or vent valve. */
export const valve = mysqlTable(
  'valve',
  {
    id: id(),
    tag: varchar('tag', { length: 12 }).notNull(),
    kind: varchar('kind', { length: 16, enum: VALVE_KINDS }).notNull(),
    lineId: ref('line_id')
      .notNull()
      .references(() => line.id),
    chainageM: double('chainage_m').notNull(),
    box: varchar('box', { length: 12 }).notNull().default(''),
    /** Segment the valve belongs to; for a gate valve the one to its west. */
    segmentId: ref('segment_id').references(() => segment.id),
    eastSegmentId: ref('east_segment_id').references(() => segment.id),
    seal: varchar('seal', { length: 40 }).notNull(),
    limitC: double('limit_c').notNull(),
    /** Share of the tube's rise above ambient that the limited part reaches. */
    partRiseShare: double('part_rise_share').notNull(),
    normalPosition: varchar('normal_position', { length: 40 }).notNull(),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('valve_tag_uq').on(t.tag)],
)

/** A pump, fixed or on a cart. Speeds at the tube, m³/s by gas. */
export const pump = mysqlTable(
  'pump',
  {
    id: id(),
    tag: varchar('tag', { length: 12 }).notNull(),
    kind: varchar('kind', { length: 24, enum: PUMP_KINDS }).notNull(),
    speeds: json('speeds', PumpSpeedsSchema).notNull(),
    ultimatePa: double('ultimate_pa').notNull().default(0),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('pump_tag_uq').on(t.tag)],
)

/** Where a pump works, and from when until when. */
export const pumpPlacement = mysqlTable(
  'pump_placement',
  {
    id: id(),
    pumpId: ref('pump_id')
      .notNull()
      .references(() => pump.id),
    segmentId: ref('segment_id')
      .notNull()
      .references(() => segment.id),
    /** Metres from the segment's start. */
    offsetM: double('offset_m').notNull(),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at'),
    reason: varchar('reason', { length: 500 }).notNull(),
  },
  (t) => [index('pump_placement_ix').on(t.segmentId, t.startsAt)],
)

/** A place where something is measured. The position stays; instruments come and go. */
export const position = mysqlTable(
  'position',
  {
    id: id(),
    tag: varchar('tag', { length: 20 }).notNull(),
    kind: varchar('kind', { length: 24, enum: POSITION_KINDS }).notNull(),
    quantity: varchar('quantity', { length: 16, enum: QUANTITY_NAMES }).notNull(),
    segmentId: ref('segment_id').references(() => segment.id),
    lineId: ref('line_id').references(() => line.id),
    chainageM: double('chainage_m'),
    label: varchar('label', { length: 80 }).notNull().default(''),
    retiredAt: utc('retired_at'),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('position_tag_uq').on(t.tag), index('position_segment_ix').on(t.segmentId)],
)

/** A physical instrument, known by its serial number. */
export const instrument = mysqlTable(
  'instrument',
  {
    id: id(),
    serial: varchar('serial', { length: 40 }).notNull(),
    kind: varchar('kind', { length: 24, enum: INSTRUMENT_KINDS }).notNull(),
    quantity: varchar('quantity', { length: 16, enum: QUANTITY_NAMES }).notNull(),
    rangeMin: double('range_min'),
    rangeMax: double('range_max'),
    calibrationDue: utc('calibration_due'),
    certificate: varchar('certificate', { length: 80 }).notNull().default(''),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('instrument_serial_uq').on(t.serial)],
)

/** Which instrument sits at a position, with its factor, between two instants. */
export const fitting = mysqlTable(
  'fitting',
  {
    id: id(),
    positionId: ref('position_id')
      .notNull()
      .references(() => position.id),
    instrumentId: ref('instrument_id')
      .notNull()
      .references(() => instrument.id),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at'),
    /** Multiplies what the instrument says. */
    factor: double('factor').notNull().default(1),
    reason: varchar('reason', { length: 500 }).notNull(),
    recordedBy: ref('recorded_by').references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
    replacedAt: utc('replaced_at'),
  },
  (t) => [index('fitting_position_ix').on(t.positionId, t.startsAt)],
)

/** A logger that delivers files. */
export const source = mysqlTable(
  'source',
  {
    id: id(),
    code: varchar('code', { length: 20 }).notNull(),
    name: varchar('name', { length: 120 }).notNull(),
    /** Site time of day at which the night's file is due, HH:MM; empty for none. */
    dueAt: varchar('due_at', { length: 5 }).notNull().default('07:00'),
    periodSeconds: int('period_seconds').notNull(),
    /** The confirmed way to read this source's files (domain/schemas/source-profile.ts); null before the first file. */
    profile: json('profile', z.unknown()),
    profileVersion: int('profile_version').notNull().default(0),
    offSince: utc('off_since'),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('source_code_uq').on(t.code)],
)

/** A raw channel of a source, by the name it has in the files. */
export const channel = mysqlTable(
  'channel',
  {
    id: id(),
    sourceId: ref('source_id')
      .notNull()
      .references(() => source.id),
    name: varchar('name', { length: 80 }).notNull(),
    /** Name without case, spaces and dashes: two spellings of one channel meet here. */
    nameKey: varchar('name_key', { length: 80 }).notNull(),
    quantity: varchar('quantity', { length: 16, enum: QUANTITY_NAMES }).notNull(),
    basis: varchar('basis', { length: 40 }).notNull().default('nitrogen-equivalent'),
    /** "Ignore from now on": lines of this channel are counted and left out. */
    ignoredSince: utc('ignored_since'),
  },
  (t) => [uniqueIndex('channel_name_uq').on(t.sourceId, t.nameKey)],
)

/** Which position a channel belongs to between two instants. A correction replaces rows and never edits them. */
export const channelMap = mysqlTable(
  'channel_map',
  {
    id: id(),
    channelId: ref('channel_id')
      .notNull()
      .references(() => channel.id),
    positionId: ref('position_id')
      .notNull()
      .references(() => position.id),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at'),
    reason: varchar('reason', { length: 500 }).notNull(),
    recordedBy: ref('recorded_by').references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
    replacedAt: utc('replaced_at'),
  },
  (t) => [
    index('channel_map_channel_ix').on(t.channelId, t.startsAt),
    index('channel_map_position_ix').on(t.positionId, t.startsAt),
  ],
)

/** A heater: the tube itself under direct current, or a blanket. */
export const heaterCircuit = mysqlTable(
  'heater_circuit',
  {
    id: id(),
    tag: varchar('tag', { length: 12 }).notNull(),
    kind: varchar('kind', { length: 16, enum: HEATER_KINDS }).notNull(),
    segmentId: ref('segment_id').references(() => segment.id),
    powerW: double('power_w'),
    volts: double('volts'),
    earthing: varchar('earthing', { length: 120 }).notNull().default(''),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('heater_circuit_tag_uq').on(t.tag)],
)

/** A direct-current supply set. */
export const supplySet = mysqlTable(
  'supply_set',
  {
    id: id(),
    tag: varchar('tag', { length: 12 }).notNull(),
    maxAmps: double('max_amps').notNull(),
    maxVolts: double('max_volts').notNull(),
    openCircuitVolts: double('open_circuit_volts').notNull(),
    note: varchar('note', { length: 500 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [uniqueIndex('supply_set_tag_uq').on(t.tag)],
)

/** A limit or target with its dates and the reason for it. Site-wide when no segment is named. */
export const limitValue = mysqlTable(
  'limit_value',
  {
    id: id(),
    kind: varchar('kind', { length: 32, enum: LIMIT_KINDS }).notNull(),
    segmentId: ref('segment_id').references(() => segment.id),
    value: double('value').notNull(),
    unit: varchar('unit', { length: 16 }).notNull(),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at'),
    reason: varchar('reason', { length: 500 }).notNull(),
    setBy: ref('set_by').references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
    replacedAt: utc('replaced_at'),
  },
  (t) => [index('limit_value_ix').on(t.kind, t.segmentId, t.startsAt)],
)

/** Other equipment looked up in the register: leak detectors, analysers, oxygen monitors, bellows scales kits. */
export const equipment = mysqlTable(
  'equipment',
  {
    id: id(),
    tag: varchar('tag', { length: 20 }).notNull(),
    kind: varchar('kind', { length: 40 }).notNull(),
    facts: varchar('facts', { length: 500 }).notNull(),
    calibrationDue: utc('calibration_due'),
  },
  (t) => [uniqueIndex('equipment_tag_uq').on(t.tag)],
)
