/** Suspected exchanges of channels as pages show them: in sentences, with the way to the form that a person may send. */
import type { Db } from '../db/client.server.ts'
import { listMaps } from '../db/queries/register-maps.server.ts'
import { findRegisterRow, listSegmentPlaces } from '../db/queries/register-rows.server.ts'
import type { Suspicion } from '../domain/crossed-channels.ts'
import { beginWords, evidenceOf } from '../domain/crossed-words.ts'
import { instantText } from '../domain/instant-text.ts'
import { type ComparedPair, compareChannels, type LabelledChannel } from './crossed-channels.server.ts'
import { getSite, instantWriter } from './site.server.ts'

export interface CrossedSuggestion {
  x: LabelledChannel
  y: LabelledChannel
  sourceCode: string
  confidence: Suspicion['confidence']
  begin: string
  evidence: string[]
  nearby: ComparedPair['nearby']
  /** The channel's page with the form filled in for the exchange. */
  to: string
}

export interface CrossedFindings {
  from: Date
  to: Date
  suggestions: CrossedSuggestion[]
  /** Pairs in which nothing speaks for an exchange. */
  clear: number
  notEvaluable: { pair: string; reason: string }[]
}

/**
 * What the comparison of a segment's hot-cathode channels with the neighbours' says.
 *
 * @param channelId only pairs with this channel
 */
export async function readCrossedFindings(
  db: Db,
  now: Date,
  segment: string,
  channelId?: number,
): Promise<CrossedFindings> {
  const [{ from, to, pairs: all }, written, site] = await Promise.all([
    compareChannels(db, now, segment),
    instantWriter(db),
    getSite(db),
  ])
  const pairs = all.filter(
    ({ x, y }) => channelId === undefined || x.channelId === channelId || y.channelId === channelId,
  )
  return {
    from,
    to,
    suggestions: pairs.flatMap((pair) =>
      pair.judgement.kind === 'suspected'
        ? [suggestion(pair, pair.judgement, (ms) => written(new Date(ms)), site.timeZone, channelId)]
        : [],
    ),
    clear: pairs.filter(({ judgement }) => judgement.kind === 'clear').length,
    notEvaluable: pairs.flatMap(({ x, y, judgement }) =>
      judgement.kind === 'not-evaluable'
        ? [{ pair: `${x.position} and ${y.position}`, reason: judgement.reason }]
        : [],
    ),
  }
}

/** The same for one channel; null when no hot-cathode gauge of a segment belongs to it at that time. */
export async function readChannelFindings(
  db: Db,
  now: Date,
  channelId: number,
): Promise<CrossedFindings | null> {
  const map = (await listMaps(db, { channelId })).find(
    ({ startsAt, endsAt }) => startsAt <= now && (endsAt === null || endsAt > now),
  )
  const position = map === undefined ? null : await findRegisterRow(db, 'positions', map.position)
  const segment = position?.columns.segmentId
  if (position?.columns.kind !== 'hot-cathode' || typeof segment !== 'number') return null
  const place = (await listSegmentPlaces(db)).find(({ id }) => id === segment)
  return place === undefined ? null : readCrossedFindings(db, now, place.tag, channelId)
}

function suggestion(
  { x, y, sourceCode, nearby }: ComparedPair,
  judgement: Suspicion,
  written: (ms: number) => string,
  zone: string,
  channelId: number | undefined,
): CrossedSuggestion {
  const names = {
    x: { tag: x.position, segment: x.segment },
    y: { tag: y.position, segment: y.segment },
  }
  // On a channel's own page the form is that channel's.
  const [own, other] = channelId === y.channelId ? [y, x] : [x, y]
  const query = new URLSearchParams({
    position: other.position,
    other: 'exchange',
    reason: `Carries the gauge of ${other.position} ${beginWords(judgement, written)}, by comparison with the other gauges of both segments.`,
    ...(judgement.begin.afterMs === null
      ? {}
      : { startsAt: typedInstant(new Date(judgement.begin.byMs), zone) }),
  })
  return {
    x,
    y,
    sourceCode,
    confidence: judgement.confidence,
    begin: beginWords(judgement, written),
    evidence: evidenceOf(judgement, names, written),
    nearby,
    to: `/register/channels/${own.channelId}?${query}#change`,
  }
}

/** An instant as a form's field takes it, with its offset: `2026-10-20 10:40+02:00`. */
function typedInstant(at: Date, zone: string): string {
  return instantText(at, zone).replace(' (UTC', '').replace(')', '')
}
