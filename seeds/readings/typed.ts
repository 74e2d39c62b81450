/** Readings that somebody read from an instrument and typed in: who, when, from what, and what was typed. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { typedReading } from '../../app/db/schema/index.ts'
import { at } from '../demo-time.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'
import { instrumentAt } from '../register/instruments.ts'
import { type DemoPosition, POSITIONS } from '../register/positions.ts'
import { channelId } from '../register/sources.ts'
import { BAKES } from '../scenario/bakes.ts'
import type { StoredReading } from './load.ts'
import { endToEndOhm, supplyOutput } from './supplies.ts'
import { wallC } from './wall-temperature.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS

interface Typing {
  at: Date
  by: PersonKey
  /** Minutes until it was typed; what was noted on paper comes later. */
  typedAfterMin: number
  /** What was read, where no instrument of the register sits at the position. */
  from?: string
  unit: string
  /** As typed, by position. */
  values: Record<string, string>
}

const SCALE = { from: 'scale on the bellows', unit: 'mm' }

const ROUNDS: readonly Typing[] = [
  {
    at: at('2026-11-05 07:35'),
    by: 'pim',
    typedAfterMin: 25,
    unit: '%',
    values: { 'OX-10': '20.9', 'OX-11': '20.7' },
  },
  // Scales of SG-08 while it cools, and of SG-05 while it is hot.
  {
    at: at('2026-11-08 16:20'),
    by: 'corwin',
    typedAfterMin: 5,
    ...SCALE,
    values: { 'BX-05-01': '33', 'BX-05-05': '34', 'BX-05-10': '33' },
  },
  {
    at: at('2026-11-08 16:40'),
    by: 'corwin',
    typedAfterMin: 6,
    ...SCALE,
    values: { 'BX-08-01': '36', 'BX-08-05': '35', 'BX-08-10': '36' },
  },
  {
    at: at('2026-11-09 07:30'),
    by: 'pim',
    typedAfterMin: 4,
    from: 'contact probe',
    unit: '°C',
    values: { 'TH-08-12': '74' },
  },
  {
    at: at('2026-11-09 07:50'),
    by: 'odalys',
    typedAfterMin: 3,
    unit: '%',
    values: { 'OX-6': '20.8', 'OX-7': '20.8', 'OX-10': '20.8' },
  },
  {
    at: at('2026-11-09 08:00'),
    by: 'nerys',
    typedAfterMin: 0,
    unit: 'Pa',
    values: {
      'HC-11A': '3.4e-5',
      'HC-11B': '2.4e-5',
      'CC-11': '3.5e-5',
      'HC-13A': '7.1e-5',
      'HC-13B': '7.2e-5',
      'CC-13': '7.0e-5',
      'TC-S1': '38',
    },
  },
]

/** The micro-ohm meter shows a tenth of a milliohm. */
function resistance(segment: string, when: Date, by: PersonKey): Typing {
  const milliohm = 1000 * endToEndOhm(segment, wallC(segment, when.getTime()))
  const tag = `RE-${segment.slice(-2)}`
  return {
    at: when,
    by,
    typedAfterMin: 12,
    from: 'micro-ohm meter of the workshop',
    unit: 'mΩ',
    values: { [tag]: milliohm.toFixed(1) },
  }
}

/** Resistance before and after every bake, and a hand meter and a clamp beside the supply set an hour into the soak. */
function aroundBakes(): Typing[] {
  return BAKES.flatMap(({ segment, supply, lead, second, rampAt, soakAt, coldAt }) => {
    const soakRead = soakAt === null ? null : new Date(soakAt.getTime() + HOUR_MS)
    const output = soakRead === null ? null : supplyOutput(supply, soakRead.getTime())
    const meters: Typing[] =
      soakRead === null || output === null
        ? []
        : [
            {
              at: soakRead,
              by: second,
              typedAfterMin: 9,
              from: 'hand meter at the bars',
              unit: 'V',
              // Less than at the terminals by the cables.
              values: { [`${supply}-U`]: (output.volts - 0.2).toFixed(1) },
            },
            {
              at: soakRead,
              by: second,
              typedAfterMin: 10,
              from: 'clamp on the feed',
              unit: 'A',
              values: { [`${supply}-I`]: String(Math.round(output.amps / 10) * 10) },
            },
          ]
    return [
      resistance(segment, new Date(rampAt.getTime() - 90 * MINUTE_MS), lead),
      ...meters,
      ...(coldAt === null ? [] : [resistance(segment, new Date(coldAt.getTime() + HOUR_MS), second)]),
    ]
  })
}

interface Typed extends Omit<Typing, 'values'> {
  id: number
  position: DemoPosition
  text: string
}

function positionOf(tag: string): DemoPosition {
  const found = POSITIONS.find((one) => one.tag === tag)
  if (found === undefined) throw new Error(`The demo has no position ${tag}`)
  return found
}

/** In the order in which they were typed, which is that of their ids. */
const TYPED: readonly Typed[] = [...ROUNDS, ...aroundBakes()]
  .flatMap(({ values, ...one }) =>
    Object.entries(values).map(([tag, text]) => ({ ...one, position: positionOf(tag), text })),
  )
  .sort((a, b) => typedAt(a).getTime() - typedAt(b).getTime())
  .map((one, index) => ({ ...one, id: index + 1 }))

function typedAt({ at: when, typedAfterMin }: Pick<Typing, 'at' | 'typedAfterMin'>): Date {
  return new Date(when.getTime() + typedAfterMin * MINUTE_MS)
}

/** Typed readings as rows; they belong to no file: their import is 0 and their line is the number of the typed line. */
export function typedReadings(): StoredReading[] {
  return TYPED.map(({ id, at: when, unit, position, text }) => ({
    channelId: channelId('HAND', position.tag),
    atMs: when.getTime(),
    seq: 0,
    value: unit === 'mΩ' ? Number((Number(text) / 1000).toPrecision(6)) : Number(text),
    bound: null,
    quality: 'manual' as const,
    marks: 0,
    importId: 0,
    lineNo: id,
  }))
}

/** Writes who typed each of them, when, and from what; instruments and people have to be there. */
export async function seedTypedReadings(db: DbOrTx): Promise<number> {
  await db.insert(typedReading).values(
    TYPED.map((one) => {
      const fitted = one.from === undefined ? instrumentAt(one.position.tag, one.at) : null
      const named = one.from ?? fitted?.serial
      if (named === undefined) throw new Error(`${one.position.tag} was read from no instrument`)
      return {
        id: one.id,
        positionId: one.position.id,
        channelId: channelId('HAND', one.position.tag),
        at: one.at,
        seq: 0,
        valueText: one.text,
        unit: one.unit,
        instrumentId: fitted?.id ?? null,
        instrumentText: named,
        typedBy: PERSON_ID[one.by],
        typedAt: typedAt(one),
      }
    }),
  )
  return TYPED.length
}
