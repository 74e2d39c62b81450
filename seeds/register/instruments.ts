/** Instruments by serial number, and where each has been fitted since when. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { fitting, instrument } from '../../app/db/schema/index.ts'
import type { Quantity } from '../../app/domain/readings.ts'
import type { InstrumentKind, PositionKind } from '../../app/domain/register.ts'
import { at, REGISTER_BEGAN } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import { EXCHANGES } from '../scenario/events.ts'
import { type DemoPosition, POSITIONS } from './positions.ts'

interface Family {
  kind: InstrumentKind
  /** Serial of the first; the others count up from it in the order of positions. */
  prefix: string
  first: number
  rangeMin: number | null
  rangeMax: number | null
}

const FAMILIES: Partial<Record<PositionKind, Family>> = {
  'hot-cathode': { kind: 'hot-cathode', prefix: 'Q-', first: 7715, rangeMin: 1e-9, rangeMax: 1e-2 },
  'cold-cathode': { kind: 'cold-cathode', prefix: 'K-', first: 4401, rangeMin: 1e-9, rangeMax: 1e-2 },
  'thermal-conductivity': {
    kind: 'thermal-conductivity',
    prefix: 'W-',
    first: 2101,
    rangeMin: 0.1,
    rangeMax: 1e5,
  },
  'supply-volts': { kind: 'supply-meter', prefix: 'V-', first: 301, rangeMin: 0, rangeMax: 100 },
  'supply-amps': { kind: 'supply-meter', prefix: 'A-', first: 301, rangeMin: 0, rangeMax: 2000 },
  'energy-meter': { kind: 'energy-meter', prefix: 'E-', first: 11, rangeMin: 0, rangeMax: 999_999 },
  'ion-pump-current': { kind: 'pump-controller', prefix: 'N-', first: 601, rangeMin: 1e-8, rangeMax: 0.1 },
  oxygen: { kind: 'oxygen-monitor', prefix: 'X-', first: 5001, rangeMin: 0, rangeMax: 25 },
}

const EXCHANGE_AT = new Map(EXCHANGES.map((one) => [one.position, one]))

interface DemoInstrument {
  id: number
  serial: string
  kind: InstrumentKind
  quantity: Quantity
  rangeMin: number | null
  rangeMax: number | null
  calibrationDue: Date | null
  certificate: string
  note: string
  /** Where it sits from the beginning, if anywhere. */
  position: DemoPosition | null
}

function fittedFromTheStart(): Omit<DemoInstrument, 'id'>[] {
  const used = new Map<PositionKind, number>()
  return POSITIONS.flatMap((position) => {
    const family = FAMILIES[position.kind]
    if (family === undefined) return []
    const index = used.get(position.kind) ?? 0
    used.set(position.kind, index + 1)
    const number = family.first + index
    const hot = position.kind === 'hot-cathode'
    return [
      {
        serial: `${family.prefix}${number}`,
        kind: family.kind,
        quantity: position.quantity,
        rangeMin: family.rangeMin,
        rangeMax: family.rangeMax,
        // Gauges go to calibration in three batches a year.
        calibrationDue: hot ? at(`2027-${['02', '06', '10'][index % 3]}-15`) : null,
        certificate: hot ? `QC-2025-${String(number - family.first + 101)}` : '',
        note: EXCHANGE_AT.get(position.tag)?.oldNote ?? (hot ? 'Two filaments' : ''),
        position,
      },
    ]
  })
}

const spare = (serial: string, note: string): Omit<DemoInstrument, 'id'> => ({
  serial,
  kind: 'hot-cathode',
  quantity: 'pressure',
  rangeMin: 1e-9,
  rangeMax: 1e-2,
  calibrationDue: at('2027-10-15'),
  certificate: `QC-2026-${serial.slice(2)}`,
  note,
  position: null,
})

/** What came in for an exchanged one: of the same kind, new. */
function replacements(fitted: readonly Omit<DemoInstrument, 'id'>[]): Omit<DemoInstrument, 'id'>[] {
  return EXCHANGES.map((one) => {
    const old = fitted.find(({ position }) => position?.tag === one.position)
    if (old === undefined) throw new Error(`The demo has no instrument at ${one.position} to exchange`)
    const hot = old.kind === 'hot-cathode'
    return {
      ...old,
      serial: one.newSerial,
      calibrationDue: hot ? new Date(one.at.getTime() + CALIBRATED_FOR_MS) : null,
      certificate: hot ? `QC-${one.at.getUTCFullYear()}-${one.newSerial.slice(2)}` : '',
      note: hot ? 'Two filaments; new when it was fitted' : 'New when it was fitted',
      position: null,
    }
  })
}

/** A new gauge goes to calibration after two years. */
const CALIBRATED_FOR_MS = 2 * 365 * 86_400_000

const FITTED = fittedFromTheStart()
const INSTRUMENTS: readonly DemoInstrument[] = [
  ...FITTED,
  ...replacements(FITTED),
  spare('Q-8121', 'Spare, in the cabinet at VB-08'),
  spare('Q-8122', 'Spare, in the cabinet at VB-08'),
].map((draft, index) => ({ id: index + 1, ...draft }))

/** The instrument that sat at a position at an instant; null where none is fitted. */
export function instrumentAt(tag: string, when: Date): { id: number; serial: string } | null {
  const exchange = EXCHANGE_AT.get(tag)
  return (
    INSTRUMENTS.find(({ serial, position }) =>
      exchange !== undefined && exchange.at <= when ? serial === exchange.newSerial : position?.tag === tag,
    ) ?? null
  )
}

/** Writes instruments and fittings. */
export async function seedInstruments(db: DbOrTx): Promise<number> {
  await db.insert(instrument).values(INSTRUMENTS.map(({ position: _place, ...row }) => row))
  const first = INSTRUMENTS.flatMap(({ id, position }) =>
    position === null
      ? []
      : [
          {
            positionId: position.id,
            instrumentId: id,
            startsAt: REGISTER_BEGAN,
            endsAt: EXCHANGE_AT.get(position.tag)?.at ?? null,
            reason: 'Fitted when the register was begun',
            recordedBy: PERSON_ID.juniper,
            recordedAt: REGISTER_BEGAN,
          },
        ],
  )
  const fresh = EXCHANGES.map((one) => {
    const place = POSITIONS.find(({ tag }) => tag === one.position)
    const fitted = INSTRUMENTS.find(({ serial }) => serial === one.newSerial)
    if (place === undefined || fitted === undefined) throw new Error(`${one.position} is not in the demo`)
    return {
      positionId: place.id,
      instrumentId: fitted.id,
      startsAt: one.at,
      endsAt: null,
      reason: one.reason,
      recordedBy: PERSON_ID[one.by],
      recordedAt: new Date(one.at.getTime() + 25 * 60_000),
    }
  })
  await db.insert(fitting).values([...first, ...fresh])
  return INSTRUMENTS.length
}
