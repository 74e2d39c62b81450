import { DomainError } from './errors.ts'
import { type Permission, ROLE_LABELS, type Role, rolesHave, whoMay } from './roles.ts'

/** The person on whose behalf something is done, with the roles in force at that moment. Always a parameter, never ambient. */
export interface Actor {
  personId: number
  name: string
  roles: readonly Role[]
}

/** Whether the actor may do something. */
export function may(actor: Actor, permission: Permission): boolean {
  return rolesHave(actor.roles, permission)
}

/** Refuses with a sentence that says who could do it. Services call this, whatever the route has checked before. */
export function demand(actor: Actor, permission: Permission): void {
  if (may(actor, permission)) return
  const held = actor.roles.length === 0 ? 'no role' : actor.roles.map((role) => ROLE_LABELS[role]).join(', ')
  throw new DomainError(
    'forbidden',
    `This needs one of: ${whoMay(permission).join(', ')}. You are signed in as ${actor.name} (${held}).`,
    { details: { permission } },
  )
}
