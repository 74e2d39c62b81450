/** Readings of a segment as CSV. Streamed channel by channel, so that a year of them does not sit in memory. */
import Papa from 'papaparse'
import type { Db } from '../db/client.server.ts'
import { findSegmentId } from '../db/queries/logbook.server.ts'
import {
  factorAt,
  listChannelReadings,
  listFittingSpans,
  listMapSpans,
  listPositions,
  type PositionRow,
} from '../db/queries/readings.server.ts'
import { DomainError } from '../domain/errors.ts'
import { bitsToMarks } from '../domain/readings.ts'
import { PRESSURE_KINDS } from './standing.server.ts'

const PAGE = 5000
const DEFAULT_DAYS = 7
const MAX_DAYS = 450

/** What may be asked for, with the heads of its value and bound. */
const ASKABLE = {
  pressure: {
    value: 'value_pa_nitrogen_equivalent',
    bound: 'bound_pa',
    has: ({ kind }: PositionRow) => (PRESSURE_KINDS as readonly string[]).includes(kind),
  },
  'ion-current': {
    value: 'value_a',
    bound: 'bound_a',
    has: ({ quantity }: PositionRow) => quantity === 'ion-current',
  },
} as const
type Asked = (typeof ASKABLE)[keyof typeof ASKABLE]

/**
 * CSV text of a segment's readings between `from` and `to` (ISO instants in the query; the last week by default).
 * `quantity` in the query is pressure, which is also meant without it, or ion-current.
 *
 * @throws DomainError not-found, bad-input
 */
export async function segmentReadingsCsv(
  db: Db,
  tag: string,
  now: Date,
  query: URLSearchParams,
): Promise<ReadableStream<Uint8Array>> {
  const segmentId = await findSegmentId(db, tag)
  if (segmentId === null) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const to = readInstant(query.get('to')) ?? now
  const from = readInstant(query.get('from')) ?? new Date(to.getTime() - DEFAULT_DAYS * 86_400_000)
  if (to.getTime() - from.getTime() > MAX_DAYS * 86_400_000) {
    throw new DomainError('bad-input', `At most ${MAX_DAYS} days at a time.`)
  }
  const lines = csvLines(db, segmentId, readAsked(query.get('quantity') ?? 'pressure'), { from, to })
  const encoder = new TextEncoder()
  return new ReadableStream({
    async pull(controller) {
      const { value, done } = await lines.next()
      if (done) controller.close()
      else controller.enqueue(encoder.encode(value))
    },
    async cancel() {
      await lines.return()
    },
  })
}

function readAsked(quantity: string): Asked {
  const known = Object.entries(ASKABLE).find(([name]) => name === quantity)
  if (known !== undefined) return known[1]
  throw new DomainError(
    'bad-input',
    `Found the quantity “${quantity}”; expected ${Object.keys(ASKABLE).join(' or ')}. Leave it out for pressures.`,
  )
}

function readInstant(text: string | null): Date | null {
  if (text === null) return null
  const at = new Date(text)
  return Number.isNaN(at.getTime()) ? null : at
}

async function* csvLines(
  db: Db,
  segmentId: number,
  asked: Asked,
  { from, to }: { from: Date; to: Date },
): AsyncGenerator<string, void, undefined> {
  yield `position,utc,${asked.value},quality,marks,${asked.bound},import,line\r\n`
  const positions = (await listPositions(db, { segmentId })).filter(asked.has)
  const ids = positions.map(({ id }) => id)
  const [spans, fittings] = await Promise.all([listMapSpans(db, ids, from, to), listFittingSpans(db, ids)])
  for (const position of positions) {
    for (const span of spans.filter(({ positionId }) => positionId === position.id)) {
      let cursor = span.from > from ? span.from : from
      const end = span.to !== null && span.to < to ? span.to : to
      for (;;) {
        const page = await listChannelReadings(db, {
          channelId: span.channelId,
          from: cursor,
          to: end,
          limit: PAGE,
        })
        const lastAt = page.at(-1)?.at.getTime()
        if (lastAt === undefined) break
        // A full page may end between two readings of one instant: those come with the next page, together.
        const full = page.length === PAGE
        const rows = full ? page.filter(({ at }) => at.getTime() < lastAt) : page
        yield `${Papa.unparse(
          rows.map((row) => [
            position.tag,
            row.at.toISOString(),
            row.value === null ? '' : row.value * factorAt(fittings, position.id, row.at),
            row.quality,
            bitsToMarks(row.marks).join(' '),
            row.bound ?? '',
            row.importId,
            row.lineNo,
          ]),
          { escapeFormulae: true, newline: '\r\n' },
        )}\r\n`
        if (!full) break
        cursor = new Date(lastAt)
      }
    }
  }
}
