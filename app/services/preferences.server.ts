import type { Db } from '../db/client.server.ts'
import { updatePreferences } from '../db/queries/people.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'

/** Stores the actor's own display settings. Nobody else's can be named. */
export async function savePreferences(
  db: Db,
  actor: Actor,
  preferences: { pressureUnit?: string; theme?: string },
): Promise<void> {
  if (preferences.pressureUnit === undefined && preferences.theme === undefined) {
    throw new DomainError('bad-input', 'Choose a unit or a theme; nothing has been changed.')
  }
  await updatePreferences(db, actor.personId, preferences)
}
