/**
 * Whether a segment's heating is energised, from the readings of the supplies that may feed it and from what people
 * said. Ebbline reads and writes down; it switches nothing.
 */
import type { DbOrTx } from '../db/client.server.ts'
import { findPositionIds } from '../db/queries/bake-runs.server.ts'
import {
  findSegments,
  lastHeatingStatements,
  listHeatingStatements,
  listSupplySets,
  runStart,
  type StatementRow,
} from '../db/queries/heating.server.ts'
import { listPermits, type PermitRow } from '../db/queries/permits.server.ts'
import {
  type ChannelReading,
  factorAt,
  lastReadings,
  listFittingSpans,
  listMapSpans,
} from '../db/queries/readings.server.ts'
import { listStates } from '../db/queries/segments.server.ts'
import { bakesIn } from '../domain/bake-history.ts'
import { judgeHeating, ON_SHARE, type SupplyNow, type SupplyReading, supplySays } from '../domain/heating.ts'
import type { HeatingFact } from '../domain/permit-facts.ts'
import type { PermitState } from '../domain/permit-words.ts'
import { planOf } from './bake-run-data.server.ts'
import { instantWriter } from './site.server.ts'

const DAY_MS = 86_400_000
const SHOWN = 12

/** Permits under which the supply they name is connected to their segments. */
const CONNECTED: readonly PermitState[] = ['issued', 'suspended', 'expired']
/** Permits whose supply may be connected already, or still, if nobody else has it. */
const PERHAPS: readonly PermitState[] = ['requested', 'approved', 'handed-back']

/**
 * What is known about the heating of segments that are heated as one. Off is said only where it is known for all.
 *
 * @param segmentTags tags of the register; those it does not know count as segments nobody has said anything about
 * @param formerly a set that fed them until their permit ended; it still counts while nobody else has it
 */
export async function readHeating(
  db: DbOrTx,
  segmentTags: readonly string[],
  now: Date,
  formerly: string | null = null,
): Promise<HeatingFact> {
  const [when, segments] = await Promise.all([instantWriter(db), findSegments(db, segmentTags)])
  const statements = await lastHeatingStatements(
    db,
    segments.map(({ id }) => id),
    now,
  )
  const tags = await suppliesOf(db, segments, { statements, formerly }, now)
  const supplies = await readSupplies(db, tags, now, when)
  return judgeHeating({ segments: segmentTags, supplies, statements }, now, when)
}

/** Tags of the sets that may feed segments now: by their permits, by what was said, by the plan of their bake. */
async function suppliesOf(
  db: DbOrTx,
  segments: readonly { id: number; tag: string }[],
  known: { statements: readonly StatementRow[]; formerly: string | null },
  now: Date,
): Promise<string[]> {
  const permits = await listPermits(db, { states: [...CONNECTED, ...PERHAPS] })
  const own = (permit: PermitRow) =>
    permit.content.segments.some((tag) => segments.some((one) => one.tag === tag))
  const named = (states: readonly PermitState[], ours: boolean) =>
    permits.flatMap((permit) =>
      states.includes(permit.state) && own(permit) === ours && permit.content.supply !== null
        ? [permit.content.supply]
        : [],
    )
  const elsewhere = named(CONNECTED, false)
  const said = known.statements.flatMap((one) => (one.on && one.supply !== null ? [one.supply] : []))
  const certain = [...named(CONNECTED, true), ...said]
  if (certain.length > 0) return [...new Set(certain)]
  const perhaps = [...named(PERHAPS, true), ...(await plannedSupplies(db, segments, now))]
  if (known.formerly !== null) perhaps.push(known.formerly)
  return [...new Set(perhaps.filter((tag) => !elsewhere.includes(tag)))]
}

/** Sets that the plans of bakes under way name. */
async function plannedSupplies(
  db: DbOrTx,
  segments: readonly { id: number }[],
  now: Date,
): Promise<string[]> {
  const found = await Promise.all(
    segments.map(async ({ id }) => {
      const bake = bakesIn(await listStates(db, id))[0]
      if (bake === undefined || bake.heatingFrom > now || bake.phase === 'over') return null
      return (await planOf(db, id, bake))?.content.supply ?? null
    }),
  )
  return found.filter((tag) => tag !== null)
}

async function readSupplies(
  db: DbOrTx,
  tags: readonly string[],
  now: Date,
  when: (at: Date) => string,
): Promise<SupplyNow[]> {
  const sets = await listSupplySets(db, tags)
  const positions = await findPositionIds(
    db,
    sets.flatMap(({ tag }) => [`${tag}-U`, `${tag}-I`]),
  )
  const ids = positions.map(({ id }) => id)
  const [spans, fittings] = await Promise.all([
    listMapSpans(db, ids, new Date(now.getTime() - DAY_MS), new Date(now.getTime() + 1)),
    listFittingSpans(db, ids),
  ])
  const newest = await lastReadings(db, [...new Set(spans.map(({ channelId }) => channelId))], now)
  const lastAt = (tag: string): (ChannelReading & { factor: number }) | null => {
    const id = positions.find((position) => position.tag === tag)?.id
    const found = spans
      .filter(({ positionId }) => positionId === id)
      .map(({ channelId }) => newest.get(channelId)?.any ?? null)
      .filter((reading) => reading !== null)
      .sort((a, b) => b.at.getTime() - a.at.getTime())[0]
    if (found === undefined || id === undefined) return null
    return { ...found, factor: factorAt(fittings, id, found.at) }
  }
  return Promise.all(
    sets.map(async ({ tag, maxAmps, openCircuitVolts }): Promise<SupplyNow> => {
      const [volts, amps] = [lastAt(`${tag}-U`), lastAt(`${tag}-I`)]
      const supply = {
        tag,
        maxAmps,
        openCircuitVolts,
        volts: asRead(volts),
        amps: asRead(amps),
        since: null,
      }
      const says = supplySays(supply, when)
      // Amps first: volts stand across an open joint too, but a run of heating is a run of current.
      const [told, full] = amps === null ? [volts, openCircuitVolts] : [amps, maxAmps]
      if (says === null || told === null) return supply
      const from = (ON_SHARE * full) / told.factor
      return { ...supply, since: await runStart(db, told.channelId, says.at, { on: says.on, from }) }
    }),
  )
}

function asRead(reading: (ChannelReading & { factor: number }) | null): SupplyReading | null {
  if (reading === null) return null
  return {
    at: reading.at,
    value: reading.value === null ? null : reading.value * reading.factor,
    quality: reading.quality,
  }
}

export interface HeatingPanel {
  fact: HeatingFact
  statements: StatementRow[]
  /** Sets that can be named in a statement. */
  supplies: string[]
}

/** What a page shows about the heating of segments, with the last statements about them. */
export async function readHeatingPanel(
  db: DbOrTx,
  segmentTags: readonly string[],
  now: Date,
): Promise<HeatingPanel> {
  const segments = await findSegments(db, segmentTags)
  const [fact, statements, supplies] = await Promise.all([
    readHeating(db, segmentTags, now),
    listHeatingStatements(
      db,
      segments.map(({ id }) => id),
      now,
      SHOWN,
    ),
    listSupplySets(db),
  ])
  return { fact, statements, supplies: supplies.map(({ tag }) => tag) }
}
