/** Ion currents of a segment: an analyser's masses and its pumps' ion parts, with four weeks of daily means. */
import type { Db } from '../db/client.server.ts'
import { binReadings, listMapSpans, listPositions, listSourceEnds } from '../db/queries/readings.server.ts'
import type { PositionKind } from '../domain/register.ts'
import { bucketStart } from '../domain/rollups.ts'
import { lastAtPositions } from './standing.server.ts'

const DAY_S = 86_400
const DAYS_SHOWN = 28
/** The last day's mean is held against the day this long before it. */
const COMPARED_DAYS = 14

export interface IonCurrent {
  tag: string
  label: string
  kind: PositionKind
  /** Last usable reading, A, and the file and line it stands in. */
  last: {
    amps: number
    at: Date
    fresh: boolean
    importId: number
    lineNo: number
    sourceCode: string | null
  } | null
  /** Geometric mean of each UTC day, A, oldest first; null for a day without a usable reading. */
  days: (number | null)[]
  /** Mean of the last day that has one over that of the day two weeks before; null where one of the two is missing. */
  twoWeeks: number | null
}

/** Positions whose quantity is an ion current, in order of tags; empty for a segment that has none. */
export async function readIonCurrents(db: Db, segmentId: number, now: Date): Promise<IonCurrent[]> {
  const positions = (await listPositions(db, { segmentId }))
    .filter(({ quantity }) => quantity === 'ion-current')
    .sort((a, b) => a.tag.localeCompare(b.tag))
  if (positions.length === 0) return []
  const from = new Date(bucketStart(now.getTime(), DAY_S) - (DAYS_SHOWN - 1) * DAY_S * 1000)
  const to = new Date(now.getTime() + 1)
  const ids = positions.map(({ id }) => id)
  const [spans, sources] = await Promise.all([listMapSpans(db, ids, from, to), listSourceEnds(db, now)])
  const [last, bins] = await Promise.all([
    lastAtPositions(db, positions, now, sources),
    binReadings(db, {
      channelIds: [...new Set(spans.map(({ channelId }) => channelId))],
      from,
      to,
      binSeconds: DAY_S,
      logarithmic: true,
    }),
  ])
  return positions.map(({ id, tag, label, kind }) => {
    const days = new Array<number | null>(DAYS_SHOWN).fill(null)
    for (const span of spans.filter(({ positionId }) => positionId === id)) {
      for (const bin of bins) {
        // A day on which the channel was moved belongs to where its last hour was spent.
        const ended = new Date(bin.atMs + DAY_S * 1000 - 1)
        if (bin.channelId !== span.channelId || ended < span.from || (span.to !== null && ended >= span.to))
          continue
        days[Math.round((bin.atMs - from.getTime()) / (DAY_S * 1000))] = bin.mean
      }
    }
    const found = last.find(({ position }) => position.id === id)
    return {
      tag,
      label,
      kind,
      last:
        found === undefined || found.value === null || found.at === null
          ? null
          : {
              amps: found.value,
              at: found.at,
              fresh: found.fresh,
              importId: found.importId ?? 0,
              lineNo: found.lineNo ?? 0,
              sourceCode: found.sourceCode,
            },
      days,
      twoWeeks: overTwoWeeks(days),
    }
  })
}

function overTwoWeeks(days: readonly (number | null)[]): number | null {
  const at = days.findLastIndex((mean) => mean !== null)
  const [late, early] = [days[at] ?? null, days[at - COMPARED_DAYS] ?? null]
  return late === null || early === null || early <= 0 ? null : late / early
}
