/** Instruments by serial number, and where each has been fitted since when. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { fitting, instrument } from '../../app/db/schema/index.ts'
import type { Quantity } from '../../app/domain/readings.ts'
import type { InstrumentKind, PositionKind } from '../../app/domain/register.ts'
import { at, REGISTER_BEGAN } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
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

/** Position whose instrument was exchanged while its segment was open, and when the new one took over. */
const EXCHANGED = { tag: 'HC-14A', at: at('2026-11-05 14:20'), newSerial: 'Q-8120' }

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
        note:
          position.tag === EXCHANGED.tag
            ? 'Filament flickered from the end of October; taken out on 2026-11-05'
            : hot
              ? 'Two filaments'
              : '',
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

const INSTRUMENTS: readonly DemoInstrument[] = [
  ...fittedFromTheStart(),
  spare(EXCHANGED.newSerial, 'Two filaments; new in October 2026'),
  spare('Q-8121', 'Spare, in the cabinet at VB-08'),
  spare('Q-8122', 'Spare, in the cabinet at VB-08'),
].map((draft, index) => ({ id: index + 1, ...draft }))

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
            endsAt: position.tag === EXCHANGED.tag ? EXCHANGED.at : null,
            reason: 'Fitted when the register was begun',
            recordedBy: PERSON_ID.juniper,
            recordedAt: REGISTER_BEGAN,
          },
        ],
  )
  const exchanged = POSITIONS.find(({ tag }) => tag === EXCHANGED.tag)
  const fresh = INSTRUMENTS.find(({ serial }) => serial === EXCHANGED.newSerial)
  if (exchanged === undefined || fresh === undefined)
    throw new Error('The exchanged gauge is not in the demo')
  await db.insert(fitting).values([
    ...first,
    {
      positionId: exchanged.id,
      instrumentId: fresh.id,
      startsAt: EXCHANGED.at,
      endsAt: null,
      reason: 'Old gauge flickered; exchanged while the segment was open',
      recordedBy: PERSON_ID.odalys,
      recordedAt: at('2026-11-05 14:45'),
    },
  ])
  return INSTRUMENTS.length
}
