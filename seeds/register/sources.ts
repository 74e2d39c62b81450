/** Loggers, their raw channels, and which position each channel belongs to since when. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { channel, channelMap, source } from '../../app/db/schema/index.ts'
import { channelKey } from '../../app/domain/register.ts'
import { type SourceProfile, SourceProfileSchema } from '../../app/domain/schemas/source-profile.ts'
import { DEMO_ZONE, REGISTER_BEGAN } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'
import { OPEN_WIRE_C } from '../readings/temperatures.ts'
import { RECORDINGS } from '../scenario/recordings.ts'
import { type DemoPosition, GASES_WATCHED, POSITIONS, type SourceCode } from './positions.ts'

/** The pressure loggers write a row a minute; before the end of October they wrote one every ten. */
const LOGGER_PERIOD_S = 60

const NITROGEN_EQUIVALENT = { kind: 'nitrogen-equivalent', gas: null } as const

interface DemoSource {
  code: SourceCode
  name: string
  dueAt: string
  periodSeconds: number
  profile: SourceProfile | null
  note: string
}

export const SOURCES: readonly DemoSource[] = [
  {
    code: 'NL-W',
    name: 'Night logger west',
    dueAt: '07:00',
    periodSeconds: LOGGER_PERIOD_S,
    profile: SourceProfileSchema.parse({
      layout: 'wide',
      separator: ';',
      decimalMark: ',',
      unit: 'mbar',
      time: { format: 'dmy', dateMark: '.', zone: DEMO_ZONE },
      basis: NITROGEN_EQUIVALENT,
      averaging: 'momentary',
      expectedPeriodSeconds: LOGGER_PERIOD_S,
    }),
    note: 'Gauges of SG-01 to SG-08. Writes site time without an offset and millibars',
  },
  {
    code: 'NL-E',
    name: 'Night logger east',
    dueAt: '07:00',
    periodSeconds: LOGGER_PERIOD_S,
    profile: SourceProfileSchema.parse({
      layout: 'long',
      separator: ',',
      decimalMark: '.',
      unit: 'Pa',
      time: { format: 'epoch-ms' },
      basis: NITROGEN_EQUIVALENT,
      averaging: 'momentary',
      expectedPeriodSeconds: LOGGER_PERIOD_S,
    }),
    note: 'Gauges of SG-09 to SG-16 and the spur. Writes milliseconds since 1970 and pascals',
  },
  {
    code: 'NL-T',
    name: 'Temperature logger',
    dueAt: '07:00',
    periodSeconds: 300,
    profile: SourceProfileSchema.parse({
      layout: 'wide',
      separator: '\t',
      decimalMark: '.',
      unit: '°C',
      time: { format: 'iso' },
      // A broken wire reads as the top of the amplifier's range.
      sentinels: [{ value: OPEN_WIRE_C, quality: 'fault' }],
      averaging: 'momentary',
      expectedPeriodSeconds: 300,
    }),
    note: 'All thermocouples; posts every five minutes while a segment is heated',
  },
  {
    code: 'NL-P',
    name: 'Power logger',
    dueAt: '07:00',
    periodSeconds: 300,
    profile: SourceProfileSchema.parse({
      layout: 'wide',
      separator: ',',
      decimalMark: '.',
      time: { format: 'iso' },
      averaging: 'momentary',
      expectedPeriodSeconds: 300,
    }),
    note: 'Supply sets, energy meters, ion-pump currents, bay fans',
  },
  {
    code: 'NL-R',
    name: 'Residual-gas logger',
    dueAt: '07:00',
    periodSeconds: 600,
    profile: SourceProfileSchema.parse({
      layout: 'wide',
      separator: ',',
      decimalMark: '.',
      unit: 'A',
      time: { format: 'elapsed-s', startFormat: 'iso', zone: DEMO_ZONE },
      averaging: 'momentary',
      expectedPeriodSeconds: 600,
      // The analyser heads its columns with bare mass numbers.
      columns: GASES_WATCHED.map((mass) => ({
        inFile: String(mass),
        channel: `RG-A-${String(mass).padStart(2, '0')}`,
        unit: 'A',
        quantity: 'ion-current',
      })),
    }),
    note: 'RG-A, ion currents by mass; counts seconds from a start that stands in its first lines',
  },
  {
    code: 'REC',
    name: 'Recorder for tests',
    dueAt: '',
    periodSeconds: 1,
    profile: SourceProfileSchema.parse({
      layout: 'wide',
      separator: ',',
      decimalMark: '.',
      time: { format: 'iso' },
      basis: NITROGEN_EQUIVALENT,
      averaging: 'momentary',
      // Set anew for each test: a file's own rows say how far apart they are.
      expectedPeriodSeconds: null,
    }),
    note: 'Put beside a gauge for a test: a row a second, or every ten minutes over night. Owes no file in the morning',
  },
  {
    code: 'HAND',
    name: 'Typed by hand',
    dueAt: '',
    periodSeconds: 0,
    profile: null,
    note: 'Read from an instrument by a person',
  },
]

/** Ids of the sources: the order of the list above, from 1. */
export const SOURCE_ID = Object.fromEntries(SOURCES.map(({ code }, index) => [code, index + 1])) as Record<
  SourceCode,
  number
>

/** Positions that the recorder has been put beside. */
const RECORDED = new Set<string>(RECORDINGS.flatMap(({ channels }) => channels))

interface DemoChannel {
  id: number
  source: SourceCode
  /** The position's tag: the loggers were labelled after the register. */
  name: string
  position: DemoPosition
}

/** Every raw channel of the demo, in the order of ids. */
export const CHANNELS: readonly DemoChannel[] = POSITIONS.flatMap((position) => {
  const logged = position.logger === null ? [] : [{ source: position.logger, position }]
  const typed = position.typed ? [{ source: 'HAND' as const, position }] : []
  const recorded = RECORDED.has(position.tag) ? [{ source: 'REC' as const, position }] : []
  return [...logged, ...typed, ...recorded]
}).map(({ source: code, position }, index) => ({
  id: index + 1,
  source: code,
  name: position.tag,
  position,
}))

const CHANNEL_IDS = new Map(CHANNELS.map(({ id, source: code, name }) => [`${code} ${name}`, id]))

/** Id of a source's channel; a channel that does not exist is a slip in the seed. */
export function channelId(code: SourceCode, name: string): number {
  const found = CHANNEL_IDS.get(`${code} ${name}`)
  if (found === undefined) throw new Error(`The demo has no channel ${name} at ${code}`)
  return found
}

/**
 * Writes sources, channels and maps. The maps say what the labels say; that two cables were exchanged on 2026-10-20 is
 * a fault of the demo's hardware, which somebody has to find.
 */
export async function seedSources(db: DbOrTx): Promise<{ sources: number; channels: number }> {
  await db.insert(source).values(
    SOURCES.map((one, index) => ({
      id: index + 1,
      ...one,
      profileVersion: one.profile === null ? 0 : one.profile.version,
    })),
  )
  await db.insert(channel).values(
    CHANNELS.map(({ id, source: code, name, position }) => ({
      id,
      sourceId: SOURCE_ID[code],
      name,
      nameKey: channelKey(name),
      quantity: position.quantity,
      basis: position.quantity === 'pressure' ? 'nitrogen-equivalent' : '',
    })),
  )
  await db.insert(channelMap).values(
    CHANNELS.map(({ id, position }) => ({
      channelId: id,
      positionId: position.id,
      startsAt: REGISTER_BEGAN,
      reason: 'As labelled',
      recordedBy: PERSON_ID.juniper,
      recordedAt: REGISTER_BEGAN,
    })),
  )
  return { sources: SOURCES.length, channels: CHANNELS.length }
}
