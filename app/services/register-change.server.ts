/** One change to one thing of the register, as its page posts it: the form says by its intent which kind of change it is. */
import type { z } from 'zod'
import type { Db } from '../db/client.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { LimitKind } from '../domain/register.ts'
import { LIMIT_KINDS } from '../domain/register.ts'
import { ProfileReadingSchema } from '../domain/schemas/profile-reading.ts'
import { editedSchema, isEditedKind, type RegisterKind } from '../domain/schemas/register.ts'
import {
  channelMapSchema,
  clockCorrectionSchema,
  fittingSchema,
  limitSchema,
  placementSchema,
} from '../domain/schemas/register-dated.ts'
import { correctClock } from './clock-corrections.server.ts'
import { editThing } from './register-edit.server.ts'
import { fitInstrument } from './register-fittings.server.ts'
import { setLimit } from './register-limits.server.ts'
import { mapChannel } from './register-maps.server.ts'
import { placePump } from './register-placements.server.ts'
import { getSite } from './site.server.ts'
import { setProfileReading } from './source-profile.server.ts'

/** Checks posted values by a schema; given by the caller, who answers for the form's words. */
export type Parse = <Schema extends z.ZodType>(schema: Schema, values: unknown) => z.infer<Schema>

/**
 * Makes the change that a posted form asks for.
 *
 * @throws DomainError whatever the change itself refuses; bad-input for a form that does not belong to this page
 */
export async function changeThing(
  db: Db,
  actor: Actor,
  now: Date,
  thing: { kind: RegisterKind; key: string },
  typed: Readonly<Record<string, string>>,
  parse: Parse,
): Promise<void> {
  const { kind, key } = thing
  const { timeZone } = await getSite(db)
  const intent = `${kind}: ${typed.intent ?? ''}`
  if (isEditedKind(kind) && typed.intent === 'edit') {
    return editThing(db, actor, now, kind, key, parse(editedSchema(kind, timeZone), typed))
  }
  if (intent === 'channels: channel-map') {
    return mapChannel(db, actor, now, numberOf(key), parse(channelMapSchema(timeZone), typed))
  }
  if (intent === 'sources: clock-correction') {
    return correctClock(db, actor, now, key, parse(clockCorrectionSchema(timeZone), typed))
  }
  if (intent === 'sources: profile-reading') {
    return setProfileReading(db, actor, now, key, parse(ProfileReadingSchema, typed))
  }
  if (intent === 'positions: fitting') {
    return fitInstrument(db, actor, now, key, parse(fittingSchema(timeZone), typed))
  }
  if (intent === 'pumps: placement') {
    return placePump(db, actor, now, key, parse(placementSchema(timeZone), typed))
  }
  if (intent === 'limits: limit') {
    return setLimit(db, actor, now, limitKind(key), parse(limitSchema(timeZone), typed))
  }
  throw new DomainError(
    'bad-input',
    'This page has no such form; nothing has been saved. Open it again from the register.',
  )
}

function numberOf(key: string): number {
  if (/^\d{1,15}$/.test(key)) return Number(key)
  throw new DomainError('not-found', `The register has no channel ${key}.`)
}

function limitKind(key: string): LimitKind {
  if ((LIMIT_KINDS as readonly string[]).includes(key)) return key as LimitKind
  throw new DomainError('not-found', `The register has no limit ${key}.`)
}
