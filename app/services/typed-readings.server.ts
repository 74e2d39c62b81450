/**
 * Readings that a person took from an instrument and typed in. They are readings of the source HAND, beside those of the
 * loggers, with import 0 and the number of the typed line as their line; who typed it, when, and from what, stands there.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  findFitted,
  findInstrument,
  findTypedSegment,
  insertHandChannel,
  insertReading,
  insertTypedReading,
  listHandChannels,
  listReadingsAt,
  listTypedPositions,
  listTypedReadings,
  lockHandSource,
  markReadingsAt,
  type TypedInstrument,
  type TypedPosition,
  type TypedRow,
  type TypedSegment,
} from '../db/queries/typed-readings.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { MARKS, qualityCode } from '../domain/readings.ts'
import { channelKey } from '../domain/register.ts'
import { WHAT_TO_DO } from '../domain/safety-events.ts'
import {
  outsideInstrument,
  readTypedValue,
  TYPED_QUANTITIES,
  type TypedQuantity,
  type TypedReadingForm,
  type TypedValue,
  valueText,
} from '../domain/schemas/typed-reading.ts'
import { reportOxygen } from './bay-closures.server.ts'
import { siteMinute } from './intake-reading.server.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { getSite } from './site.server.ts'

const LISTED = 12
const AHEAD_MS = 5 * 60_000
/** What was noted on paper is typed within the month (our own rule); older figures are a matter for an engineer. */
const BACK_MS = 31 * 86_400_000
const MOST_AT_ONE_INSTANT = 255

export interface TypedReadingPageData {
  tag: string
  positions: (TypedPosition & { quantity: TypedQuantity; fitted: string | null })[]
  typed: TypedRow[]
}

/**
 * Positions that can be typed at a segment, with the instrument that sits there, and what was typed last.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readTypedReadingPage(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
): Promise<TypedReadingPageData> {
  demand(actor, 'reading:type')
  const segment = await segmentOf(db, tag)
  const positions = await positionsOf(db, segment, now)
  const [typed, fitted] = await Promise.all([
    listTypedReadings(
      db,
      positions.map(({ id }) => id),
      LISTED,
    ),
    Promise.all(positions.map(({ id }) => findFitted(db, id, now))),
  ])
  return {
    tag: segment.tag,
    typed,
    positions: positions.map((position, index) => ({ ...position, fitted: fitted[index]?.serial ?? null })),
  }
}

async function segmentOf(db: DbOrTx, tag: string): Promise<TypedSegment> {
  const segment = await findTypedSegment(db, tag)
  if (segment === null) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  return segment
}

async function positionsOf(
  db: DbOrTx,
  segment: TypedSegment,
  now: Date,
): Promise<(TypedPosition & { quantity: TypedQuantity })[]> {
  const positions = await listTypedPositions(db, segment, TYPED_QUANTITIES, now)
  return positions.map((position) => ({ ...position, quantity: position.quantity as TypedQuantity }))
}

/**
 * Stores a typed reading.
 *
 * @returns one sentence for the person: what was stored, or that it was there already
 * @throws DomainError forbidden, not-found, bad-input (each field with what was found, expected and how to mend it),
 *   conflict (the register has the position's hand channel somewhere else)
 */
export async function typeReading(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  form: TypedReadingForm,
): Promise<string> {
  demand(actor, 'reading:type')
  const segment = await segmentOf(db, tag)
  const { timeZone } = await getSite(db)
  const when = siteMinute(form.at, timeZone)
  refuseInstant(form.at, now, when, siteMinute(now, timeZone))
  const position = (await positionsOf(db, segment, now)).find((one) => one.tag === form.position)
  if (position === undefined) {
    throw fieldFault({
      position: `Found “${form.position}”; expected a position in use at ${segment.tag}. Choose one from the list.`,
    })
  }
  const read = readTypedValue(form.value, form.unit, position.quantity)
  if (!read.ok) throw fieldFault({ [read.field]: read.message })
  const instrument = await instrumentOf(db, position, form, when)
  if (read.typed.value !== null && instrument.known !== null) {
    const outside = outsideInstrument(read.typed.value, position.quantity, instrument.known)
    if (outside !== null) throw fieldFault({ value: outside })
  }
  const one = { form, position, instrument, typed: read.typed }
  const { stored, warning } = await tx(db, async (inside) => {
    const done = await store(inside, actor, now, one)
    return { stored: done, warning: done === 'held' ? '' : await judgeAir(inside, actor, now, segment, one) }
  })
  const what = `${position.tag} at ${when}: ${shownAs(read.typed, position.quantity, form)}`
  if (stored === 'held') return `${what} was there already. Nothing was added.`
  if (stored === 'conflict')
    return `${what}, written down beside a different value of the same minute. Both are marked.${warning}`
  return `${what}, written down.${warning}`
}

/** A reading of oxygen says whether people may be there. @returns what to do, or nothing */
async function judgeAir(
  inside: DbOrTx,
  actor: Actor,
  now: Date,
  segment: TypedSegment,
  { form, position, instrument, typed }: TypedOne,
): Promise<string> {
  if (position.quantity !== 'oxygen' || typed.value === null) return ''
  const { answer } = await reportOxygen(
    inside,
    {
      lineId: segment.lineId,
      segmentId: segment.id,
      percent: typed.value,
      at: form.at,
      actor,
      permitId: null,
      text: `typed at ${position.tag} from ${instrument.text}`,
      place: position.tag,
      instrument: instrument.text,
    },
    now,
  )
  if (answer === 'good') return ''
  return ` ${WHAT_TO_DO[answer === 'low' ? 'low-oxygen' : 'high-oxygen']}`
}

function refuseInstant(at: Date, now: Date, when: string, present: string): void {
  if (at.getTime() > now.getTime() + AHEAD_MS)
    throw fieldFault({
      at: `Found ${when}; expected now (${present}) or earlier. Type when the instrument was read.`,
    })
  if (at.getTime() < now.getTime() - BACK_MS)
    throw fieldFault({
      at: `Found ${when}; expected a time within the last 31 days. Check the date; older figures belong in a log entry.`,
    })
}

interface NamedInstrument {
  known: TypedInstrument | null
  text: string
}

/** The instrument that was read: the one named, or else the one that sat there. */
async function instrumentOf(
  db: Db,
  position: TypedPosition,
  form: TypedReadingForm,
  when: string,
): Promise<NamedInstrument> {
  if (form.instrument === '') {
    const fitted = await findFitted(db, position.id, form.at)
    if (fitted !== null) return { known: fitted, text: fitted.serial }
    throw fieldFault({
      instrument: `Found nothing, and the register knows no instrument at ${position.tag} at ${when}; expected the instrument that was read. Type its serial number or what it is, such as “steel rule”.`,
    })
  }
  const known = await findInstrument(db, form.instrument)
  if (known === null || known.quantity === position.quantity)
    return { known, text: known?.serial ?? form.instrument }
  throw fieldFault({
    instrument: `Found ${known.serial}, which reads ${known.quantity}; expected an instrument for ${position.quantity}. Choose the instrument that was read.`,
  })
}

interface TypedOne {
  form: TypedReadingForm
  position: TypedPosition & { quantity: TypedQuantity }
  instrument: NamedInstrument
  typed: TypedValue
}

async function store(
  inside: DbOrTx,
  actor: Actor,
  now: Date,
  one: TypedOne,
): Promise<'stored' | 'held' | 'conflict'> {
  const { form, position, instrument, typed } = one
  // The lock lets two people, or one who pressed twice, come one after the other.
  const sourceId = await lockHandSource(inside)
  const channelId = await handChannel(inside, actor, now, sourceId, position, form.at)
  const quality = qualityCode(typed.quality)
  const there = await listReadingsAt(inside, channelId, form.at)
  const same = there.some(
    (row) => row.value === typed.value && row.bound === typed.bound && row.quality === quality,
  )
  if (same) return 'held'
  const seq = there.length === 0 ? 0 : (there.at(-1)?.seq ?? 0) + 1
  if (seq > MOST_AT_ONE_INSTANT)
    throw fieldFault({ at: 'There are too many readings of this minute already. Give the minute after.' })
  const typedId = await insertTypedReading(inside, {
    positionId: position.id,
    channelId,
    at: form.at,
    seq,
    valueText: form.value,
    unit: form.unit,
    instrumentId: instrument.known?.id ?? null,
    instrumentText: instrument.text,
    note: form.note,
    typedBy: actor.personId,
    typedAt: now,
  })
  const { value, bound } = typed
  await insertReading(inside, {
    channelId,
    at: form.at,
    seq,
    value,
    bound,
    quality,
    importId: 0,
    lineNo: typedId,
  })
  if (seq > 0) await markReadingsAt(inside, channelId, form.at, MARKS.conflict)
  await writeRecord(inside, {
    at: now,
    actor,
    act: 'reading typed',
    subjectKind: 'position',
    subjectId: String(position.id),
    effectiveAt: form.at,
    after: {
      position: position.tag,
      typed: `${form.value} ${form.unit}`,
      value,
      bound,
      quality: typed.quality,
      instrument: instrument.text,
      note: form.note,
    },
  })
  return seq === 0 ? 'stored' : 'conflict'
}

async function handChannel(
  inside: DbOrTx,
  actor: Actor,
  now: Date,
  sourceId: number,
  position: TypedPosition,
  at: Date,
): Promise<number> {
  const nameKey = channelKey(position.tag)
  const found = await listHandChannels(inside, { sourceId, positionId: position.id, nameKey, at })
  const mapped = found.find(({ positionId }) => positionId === position.id)
  if (mapped !== undefined) return mapped.id
  if (found.length > 0) {
    throw new DomainError(
      'conflict',
      `The register does not give the typed readings of ${position.tag} to this position at that time. An engineer sets it right under Register, Channel maps; nothing has been saved.`,
    )
  }
  return insertHandChannel(
    inside,
    {
      sourceId,
      name: position.tag,
      nameKey,
      quantity: position.quantity,
      basis: position.quantity === 'pressure' ? 'nitrogen-equivalent' : '',
    },
    {
      positionId: position.id,
      // As far back as anything may be typed today.
      startsAt: new Date(now.getTime() - BACK_MS),
      reason: 'First reading typed here',
      recordedBy: actor.personId,
      recordedAt: now,
    },
  )
}

function shownAs(typed: TypedValue, quantity: TypedQuantity, form: TypedReadingForm): string {
  return typed.value === null ? `${form.value} ${form.unit}` : valueText(typed.value, quantity)
}
