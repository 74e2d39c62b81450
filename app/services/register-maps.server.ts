/**
 * Which position a channel belongs to, from when to when. A change replaces rows and edits none; the readings stay
 * with their raw channel, so everything before the change's instant reads as it did.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type ChannelFacts,
  insertMap,
  listChannels,
  listMaps,
  lockSource,
  type MapRow,
  replaceMaps,
} from '../db/queries/register-maps.server.ts'
import { findRegisterRow } from '../db/queries/register-rows.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { clip, nextChange, overlaps, type Span, writeOver } from '../domain/dated-spans.ts'
import { DomainError } from '../domain/errors.ts'
import type { ChannelMapForm } from '../domain/schemas/register-dated.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault, stretchOf } from './register-values.server.ts'
import { markOutOfDate } from './revisions.server.ts'
import { instantWriter } from './site.server.ts'

/** What a map said over a window, as it goes on record. */
interface MapLine {
  channel: string
  position: string | null
  from: Date
  to: Date | null
}

/**
 * Says to which position a channel belongs from an instant on: until the given end, or else until the next change
 * that is recorded for it.
 *
 * Where another channel of the same source already belongs to that position, the form must say what becomes of it:
 * the two exchange their positions, or the other one is released.
 *
 * @throws DomainError forbidden, not-found, conflict (the maps were changed since the form was made), bad-input
 */
export async function mapChannel(
  db: Db,
  actor: Actor,
  now: Date,
  channelId: number,
  form: ChannelMapForm,
): Promise<void> {
  demand(actor, 'register:edit')
  await tx(db, async (inside) => {
    const [own] = await listChannels(inside, channelId)
    if (own === undefined) throw new DomainError('not-found', `The register has no channel ${channelId}.`)
    await lockSource(inside, own.sourceId)
    const maps = await listMaps(inside, { sourceId: own.sourceId })
    const ownMaps = maps.filter((row) => row.channelId === own.id)
    const written = await instantWriter(inside)
    refuseStale(ownMaps, form.seen, own, written)

    const positionId = form.position === '' ? null : await positionFor(inside, own, form.position)
    const window: Span = {
      startsAt: form.startsAt,
      endsAt: form.endsAt ?? nextChange(ownMaps, form.startsAt),
    }
    const before = clip(ownMaps, window)
    if (saysTheSame(before, window, positionId)) {
      throw fieldFault({ position: `${own.name} has belonged there for the whole of this time already.` })
    }
    const rival = positionId === null ? null : rivalOf(maps, own, positionId, window, form.other)
    const writer = { inside, actor, now, reason: form.reason }
    const touched = [stretchOf(own.id, window)]
    const change = { before: before.map((part) => lineOf(part.of, part)), after: [] as MapLine[] }

    await clear(writer, ownMaps, window)
    if (positionId !== null) await write(writer, own.id, positionId, window)
    change.after.push({
      channel: own.name,
      position: positionId === null ? null : form.position,
      from: window.startsAt,
      to: window.endsAt,
    })

    if (rival !== null) {
      const rivalMaps = maps.filter((row) => row.channelId === rival.channelId)
      const taken = clip(
        rivalMaps.filter((row) => row.positionId === positionId),
        window,
      )
      change.before.push(...taken.map((part) => lineOf(part.of, part)))
      // Only the time in which the two met changes hands.
      for (const part of taken) {
        touched.push(stretchOf(rival.channelId, part))
        const others = rivalMaps.filter((row) => row.id === part.of.id)
        await clear(writer, others, part)
        const given = form.other === 'exchange' ? clip(ownMaps, part) : []
        for (const piece of given) await write(writer, rival.channelId, piece.of.positionId, piece)
        change.after.push(...given.map((piece) => ({ ...lineOf(piece.of, piece), channel: rival.channel })))
        if (given.length === 0)
          change.after.push({ channel: rival.channel, position: null, from: part.startsAt, to: part.endsAt })
      }
    }
    await markOutOfDate(inside, {
      stretches: touched,
      now,
      reason: `The map of ${own.name} was changed from ${written(form.startsAt)}: ${form.reason}`,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'channel map changed',
      subjectKind: 'channel',
      subjectId: String(own.id),
      effectiveAt: form.startsAt,
      before: change.before,
      after: change.after,
      reason: form.reason,
    })
  })
}

function refuseStale(
  ownMaps: readonly MapRow[],
  seen: number,
  own: ChannelFacts,
  written: (at: Date) => string,
): void {
  const newest = ownMaps.reduce((highest, { id }) => Math.max(highest, id), 0)
  if (newest === seen) return
  const row = ownMaps.find(({ id }) => id === newest)
  const told =
    row === undefined
      ? ''
      : ` ${row.recordedBy ?? 'The product'} mapped it to ${row.position} from ${written(row.startsAt)}.`
  throw new DomainError(
    'conflict',
    `The map of ${own.name} has been changed since you opened this form.${told} Nothing of yours has been saved: look at the present map and do it again.`,
  )
}

async function positionFor(inside: DbOrTx, own: ChannelFacts, tag: string): Promise<number> {
  const row = await findRegisterRow(inside, 'positions', tag)
  if (row === null)
    throw fieldFault({
      position: `The register has no position "${tag}". Give a tag such as HC-03B, or add the position first.`,
    })
  if (row.columns.quantity === own.quantity) return row.id
  throw fieldFault({
    position: `${row.tag} measures ${String(row.columns.quantity)}, this channel ${own.quantity}. Choose a position of the same quantity.`,
  })
}

function saysTheSame(
  before: readonly { of: MapRow; startsAt: Date; endsAt: Date | null }[],
  window: Span,
  positionId: number | null,
): boolean {
  if (positionId === null) return before.length === 0
  const [only] = before
  return (
    before.length === 1 &&
    only?.of.positionId === positionId &&
    only.startsAt.getTime() === window.startsAt.getTime() &&
    (only.endsAt?.getTime() ?? null) === (window.endsAt?.getTime() ?? null)
  )
}

/** The other channel of the source that belongs to the position in the window, once the form has said what becomes of it. */
function rivalOf(
  maps: readonly MapRow[],
  own: ChannelFacts,
  positionId: number,
  window: Span,
  other: ChannelMapForm['other'],
): MapRow | null {
  const rivals = maps.filter(
    (row) => row.positionId === positionId && row.channelId !== own.id && overlaps(row, window),
  )
  const names = [...new Set(rivals.map(({ channel }) => channel))]
  const [first] = rivals
  if (first === undefined) return null
  if (names.length > 1) {
    throw fieldFault({
      startsAt: `Several channels belong to ${first.position} in this time: ${names.join(', ')}. Change it in shorter stretches, one channel at a time.`,
    })
  }
  if (other !== '') return first
  throw fieldFault({
    other: `${first.channel} of the same source belongs to ${first.position} in this time. Say whether the two exchange their positions or ${first.channel} is released.`,
  })
}

interface Writer {
  inside: DbOrTx
  actor: Actor
  now: Date
  reason: string
}

/** Takes a window out of recorded rows: replaces them by what is left on either side. */
async function clear(writer: Writer, rows: readonly MapRow[], window: Span): Promise<void> {
  const { replaced, remnants } = writeOver(rows, window)
  await replaceMaps(
    writer.inside,
    replaced.map(({ id }) => id),
    writer.now,
  )
  for (const { of, startsAt, endsAt } of remnants) {
    await write({ ...writer, reason: of.reason }, of.channelId, of.positionId, { startsAt, endsAt })
  }
}

function write(
  { inside, actor, now, reason }: Writer,
  channelId: number,
  positionId: number,
  span: Span,
): Promise<void> {
  return insertMap(inside, {
    channelId,
    positionId,
    startsAt: span.startsAt,
    endsAt: span.endsAt,
    reason,
    recordedBy: actor.personId,
    recordedAt: now,
  })
}

function lineOf(row: MapRow, span: Span): MapLine {
  return { channel: row.channel, position: row.position, from: span.startsAt, to: span.endsAt }
}
