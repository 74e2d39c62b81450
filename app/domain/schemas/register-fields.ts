/**
 * The fields of the register's forms: what each is called, how it is asked for and what it takes. One list a kind of
 * thing serves the page that shows it, the form that edits it, and the check on both sides.
 */
import { z } from 'zod'
import { QUANTITIES, QUANTITY_NAMES } from '../readings.ts'
import {
  FEEDERS,
  HEATER_KIND_LABELS,
  HEATER_KINDS,
  INSTRUMENT_KINDS,
  POSITION_KIND_LABELS,
  POSITION_KINDS,
  PUMP_KIND_LABELS,
  PUMP_KINDS,
  PUMPED_GASES,
  type PumpedGas,
  VALVE_KIND_LABELS,
  VALVE_KINDS,
} from '../register.ts'
import {
  type FieldValue,
  lastDayValue,
  type NumberRule,
  numberValue,
  optionalInstant,
  textValue,
  tickValue,
} from './register-values.ts'

export type FieldInput =
  | 'text'
  | 'long-text'
  | 'number'
  | 'choice'
  | 'instant'
  | 'last-day'
  | 'tick'
  | 'segment'

export interface FieldFact {
  /** Name in the form; the column's name too, except for speeds and segments. */
  name: string
  label: string
  input: FieldInput
  unit: string
  hint: string
  options: readonly { value: string; label: string }[]
  /** Set for the speed of a pump for one gas. */
  gas: PumpedGas | null
  schema: (zone: string) => z.ZodType<FieldValue>
}

type Extra = Partial<Pick<FieldFact, 'hint' | 'gas'>>

function fact(
  name: string,
  label: string,
  input: FieldInput,
  schema: FieldFact['schema'],
  extra: Partial<FieldFact> = {},
): FieldFact {
  return { name, label, input, unit: '', hint: '', options: [], gas: null, schema, ...extra }
}

function number(name: string, label: string, rule: NumberRule, extra: Extra = {}): FieldFact {
  return fact(name, label, 'number', () => numberValue(rule), { unit: rule.unit, ...extra })
}

function text(
  name: string,
  label: string,
  max: number,
  extra: Extra & { optional?: boolean } = {},
): FieldFact {
  const { optional = false, ...rest } = extra
  const rule = { max, optional, what: label.toLowerCase() }
  return fact(name, label, max > 130 ? 'long-text' : 'text', () => textValue(rule), rest)
}

function choice<Value extends string>(
  name: string,
  label: string,
  values: readonly [Value, ...Value[]],
  labels: Record<Value, string>,
): FieldFact {
  return fact(
    name,
    label,
    'choice',
    () => z.enum(values, { error: `Choose one: ${values.map((value) => labels[value]).join(', ')}.` }),
    {
      options: values.map((value) => ({ value, label: labels[value] })),
    },
  )
}

/** Which feeder heats a segment. It may stay open, and then no feeder's limit counts a bake of it. */
function feederChoice(): FieldFact {
  const options = [
    { value: '', label: 'Not known' },
    ...FEEDERS.map((value) => ({ value, label: `Feeder ${value}` })),
  ]
  const error = `Choose one: ${options.map(({ label }) => label).join(', ')}.`
  return fact(
    'feeder',
    'Feeder for bakes',
    'choice',
    () => z.enum(['', ...FEEDERS], { error }).transform((value) => (value === '' ? null : value)),
    { options, hint: 'While it is not known, a bake of this segment counts on neither feeder.' },
  )
}

function tick(name: string, label: string): FieldFact {
  return fact(name, label, 'tick', () => tickValue())
}

function segment(label: string, extra: Extra = {}): FieldFact {
  return fact(
    'segment',
    label,
    'segment',
    () => textValue({ max: 12, optional: true, what: 'a segment' }),
    extra,
  )
}

const NOTE = text('note', 'Note', 500, { optional: true })

function quantityLabels(): Record<(typeof QUANTITY_NAMES)[number], string> {
  const labels = QUANTITY_NAMES.map((name) => [
    name,
    QUANTITIES[name].unit === ''
      ? QUANTITIES[name].label
      : `${QUANTITIES[name].label}, ${QUANTITIES[name].unit}`,
  ])
  return Object.fromEntries(labels) as Record<(typeof QUANTITY_NAMES)[number], string>
}

/** Kinds of instrument in words: the hyphens of the codes become spaces. */
function instrumentLabels(): Record<(typeof INSTRUMENT_KINDS)[number], string> {
  const labels = INSTRUMENT_KINDS.map((kind) => [
    kind,
    kind.charAt(0).toUpperCase() + kind.slice(1).replaceAll('-', ' '),
  ])
  return Object.fromEntries(labels) as Record<(typeof INSTRUMENT_KINDS)[number], string>
}

export const SEGMENT_FIELDS: readonly FieldFact[] = [
  number('startM', 'Starts at chainage', { min: 0, max: 100_000, unit: 'm' }),
  number('endM', 'Ends at chainage', { min: 0, max: 100_000, unit: 'm' }),
  number('innerDiameterM', 'Inner diameter', { min: 0.02, max: 5, unit: 'm' }),
  number(
    'wallM',
    'Wall thickness',
    { min: 0.0003, max: 0.1, unit: 'm' },
    { hint: 'In metres: 3 mm is 0.003.' },
  ),
  text('steel', 'Steel', 20),
  tick('vacuumFired', 'Fired in vacuum before assembly'),
  number(
    'lastBakeYear',
    'Year of the last completed bake',
    { min: 1950, max: 2200, unit: '', whole: true, optional: true },
    { hint: 'Leave empty if it was never baked.' },
  ),
  choice('hydrogenModel', 'Hydrogen model', ['diffusion', 'low-hydrogen'], {
    diffusion: 'Diffusion out of the wall',
    'low-hydrogen': 'Low hydrogen, measured floor',
  }),
  number(
    'hydrogenC0',
    'Mobile hydrogen in the wall',
    { min: 1e20, max: 1e27, unit: 'atoms/m³', optional: true },
    { hint: 'Needed for the diffusion model.' },
  ),
  number(
    'hydrogenQ20',
    'Hydrogen outgassing at 20 °C',
    { min: 1e-14, max: 1e-4, unit: 'Pa·m/s', optional: true },
    { hint: 'Needed for the low-hydrogen model.' },
  ),
  text('hydrogenOrigin', 'Where the hydrogen figure comes from', 300, {
    hint: 'Measured (when, how) or assumed (why).',
  }),
  number('waterCapacity', 'Water held by the wall', { min: 1e16, max: 1e23, unit: 'molecules/m²' }),
  text('waterOrigin', 'Where the water figure comes from', 300),
  number('bellowsCount', 'Bellows', { min: 0, max: 1000, unit: '', whole: true }),
  number('bellowsTravelMm', 'Travel expected of each bellows', { min: 0, max: 1000, unit: 'mm' }),
  number('bellowsRatedMm', 'Rated stroke of each bellows', { min: 0, max: 1000, unit: 'mm' }),
  number('insulationM', 'Insulation thickness', { min: 0, max: 2, unit: 'm' }),
  number('insulationWPerMK', 'Insulation conductivity', { min: 0.001, max: 10, unit: 'W/(m·K)' }),
  number('resistance20Ohm', 'Resistance end to end at 20 °C', { min: 1e-6, max: 10, unit: 'Ω' }),
  feederChoice(),
]

export const POSITION_FIELDS: readonly FieldFact[] = [
  choice('kind', 'Kind', POSITION_KINDS, POSITION_KIND_LABELS),
  choice('quantity', 'Quantity', QUANTITY_NAMES, quantityLabels()),
  segment('Segment', { hint: 'Leave empty for a position that belongs to no segment.' }),
  number('chainageM', 'Chainage', { min: 0, max: 100_000, unit: 'm', optional: true }),
  text('label', 'Where it is, in words', 80, { optional: true }),
  fact('retiredAt', 'Out of use since', 'instant', optionalInstant, {
    hint: 'Leave empty while it is in use.',
  }),
]

export const INSTRUMENT_FIELDS: readonly FieldFact[] = [
  choice('kind', 'Kind', INSTRUMENT_KINDS, instrumentLabels()),
  choice('quantity', 'Quantity', QUANTITY_NAMES, quantityLabels()),
  number(
    'rangeMin',
    'Reads from',
    { min: -1e6, max: 1e9, unit: '', optional: true },
    { hint: 'In the unit of the quantity.' },
  ),
  number('rangeMax', 'Reads up to', { min: -1e6, max: 1e9, unit: '', optional: true }),
  fact('calibrationDue', 'Calibrated up to and including', 'last-day', lastDayValue, {
    hint: 'Year-month-day, such as 2027-03-31; empty if it has none.',
  }),
  text('certificate', 'Calibration certificate', 80, { optional: true }),
  NOTE,
]

export const PUMP_FIELDS: readonly FieldFact[] = [
  choice('kind', 'Kind', PUMP_KINDS, PUMP_KIND_LABELS),
  ...PUMPED_GASES.map((gas) =>
    number(
      `speed${gas}`,
      `Speed for ${gas}`,
      { min: 0, max: 1000, unit: 'm³/s', optional: true },
      { gas, hint: 'At the tube. Empty: not known. 0: does not pump it.' },
    ),
  ),
  number('ultimatePa', 'Lowest pressure it reaches by itself', { min: 0, max: 2e5, unit: 'Pa' }),
  NOTE,
]

export const VALVE_FIELDS: readonly FieldFact[] = [
  choice('kind', 'Kind', VALVE_KINDS, VALVE_KIND_LABELS),
  number('chainageM', 'Chainage', { min: 0, max: 100_000, unit: 'm' }),
  text('box', 'Valve box', 12, { optional: true }),
  text('seal', 'Seat and seal', 40),
  number('limitC', 'Highest temperature of the limited part', { min: 20, max: 600, unit: '°C' }),
  number(
    'partRiseShare',
    "Share of the tube's rise that this part sees",
    { min: 0, max: 1, unit: '' },
    { hint: '1 for a part as hot as the tube; 0.7 for seven tenths of its rise over ambient.' },
  ),
  text('normalPosition', 'Position in service', 40),
  NOTE,
]

export const CIRCUIT_FIELDS: readonly FieldFact[] = [
  choice('kind', 'Kind', HEATER_KINDS, HEATER_KIND_LABELS),
  segment('Segment'),
  number('powerW', 'Power', { min: 0, max: 1e6, unit: 'W', optional: true }),
  number('volts', 'Voltage', { min: 0, max: 1000, unit: 'V', optional: true }),
  text('earthing', 'Where the circuit is earthed', 120, { optional: true }),
  NOTE,
]

export const SUPPLY_FIELDS: readonly FieldFact[] = [
  number('maxAmps', 'Highest current', { min: 0, max: 100_000, unit: 'A' }),
  number('maxVolts', 'Highest voltage under load', { min: 0, max: 1000, unit: 'V' }),
  number(
    'openCircuitVolts',
    'Open-circuit voltage',
    { min: 0, max: 1000, unit: 'V' },
    { hint: 'What stands across a joint that opens under load.' },
  ),
  NOTE,
]

export const SOURCE_FIELDS: readonly FieldFact[] = [
  text('name', 'Name', 120),
  fact(
    'dueAt',
    'File due at, site time',
    'text',
    () =>
      z
        .string()
        .trim()
        .regex(
          /^(?:(?:[01]\d|2[0-3]):[0-5]\d)?$/,
          'Write a time of day like 07:00, or leave it empty if no file is expected.',
        ),
    { hint: 'Empty if no file is expected by a time of day.' },
  ),
  number('periodSeconds', 'Time between readings', { min: 1, max: 86_400, unit: 's', whole: true }),
  fact('offSince', 'Out of use since', 'instant', optionalInstant, {
    hint: 'Leave empty while it delivers.',
  }),
  NOTE,
]
