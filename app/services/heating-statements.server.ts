/** What people say about a heating. Ebbline writes it down and looks what follows; it switches nothing. */
import type { Db } from '../db/client.server.ts'
import { findSegments, insertHeatingStatement, listSupplySets } from '../db/queries/heating.server.ts'
import { findPermit } from '../db/queries/permits.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { HeatingFact } from '../domain/permit-facts.ts'
import type { HeatingForm } from '../domain/schemas/heating.ts'
import { readHeating } from './heating.server.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { noteDangersAtSegments } from './safety-events.server.ts'
import { instantWriter } from './site.server.ts'

/** What was done at the tube is written down within two days (our own rule). */
const BACK_MS = 2 * 86_400_000

/**
 * Writes down what a person says about the heating of segments, and looks at once what follows from it.
 *
 * @returns what is known about their heating then
 * @throws DomainError forbidden, not-found, bad-input
 */
export async function stateHeating(
  db: Db,
  actor: Actor,
  now: Date,
  segmentTags: readonly string[],
  form: HeatingForm,
): Promise<HeatingFact> {
  demand(actor, 'heating:state')
  const segments = await findSegments(db, segmentTags)
  const known = new Set(segments.map(({ tag }) => tag))
  const missing = segmentTags.find((tag) => !known.has(tag))
  if (missing !== undefined || segments.length === 0) {
    throw new DomainError('not-found', `The register has no segment ${missing ?? 'of this name'}.`)
  }
  const when = await instantWriter(db)
  if (form.at > now) {
    throw fieldFault({
      at: `Found ${when(form.at)}; expected now (${when(now)}) or earlier. Say what is, not what will be.`,
    })
  }
  if (form.at.getTime() < now.getTime() - BACK_MS) {
    throw fieldFault({
      at: `Found ${when(form.at)}; expected a time within the last two days. Check the date.`,
    })
  }
  const supply = form.supply === '' ? null : ((await listSupplySets(db, [form.supply]))[0] ?? null)
  if (form.supply !== '' && supply === null) {
    throw fieldFault({ supply: `The register has no supply set ${form.supply}. Choose one from the list.` })
  }
  return tx(db, async (inside) => {
    for (const segment of segments) {
      await insertHeatingStatement(inside, {
        segmentId: segment.id,
        on: form.on,
        at: form.at,
        supplySetId: supply?.id ?? null,
        how: form.how,
        personId: actor.personId,
        recordedAt: now,
      })
      await writeRecord(inside, {
        at: now,
        actor,
        act: form.on ? 'heating stated on' : 'heating stated off',
        subjectKind: 'segment',
        subjectId: segment.tag,
        effectiveAt: form.at,
        after: { on: form.on, supply: supply?.tag ?? null, how: form.how },
      })
    }
    await noteDangersAtSegments(inside, segmentTags, now)
    return readHeating(inside, segmentTags, now)
  })
}

/** Tags of a permit's segments. @throws DomainError not-found; also where the permit names none yet */
export async function segmentsOfPermit(db: Db, number: string): Promise<string[]> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  if (permit.content.segments.length === 0) {
    throw new DomainError('not-found', `${number} names no segment yet, so it has no heating.`)
  }
  return permit.content.segments
}

/** The tag of a segment of the register. @throws DomainError not-found */
export async function knownSegment(db: Db, tag: string): Promise<string> {
  const [found] = await findSegments(db, [tag])
  if (found === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  return found.tag
}
