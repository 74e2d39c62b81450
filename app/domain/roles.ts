/**
 * Who may do what. Roles are granted to people with dates; permissions are typed strings decided here, in code,
 * and asked for by services as well as routes.
 */

export const ROLES = [
  'technician',
  'engineer',
  'safety-officer',
  'manager',
  'administrator',
  'contributor',
] as const

/** The five roles of a site, and the contributor grant for outside people (entries and photos only). */
export type Role = (typeof ROLES)[number]

export const ROLE_LABELS: Record<Role, string> = {
  technician: 'Vacuum technician',
  engineer: 'Vacuum engineer',
  'safety-officer': 'Safety officer',
  manager: 'Facility manager',
  administrator: 'Administrator',
  contributor: 'Contributor',
}

const ROLES_BY_PERMISSION = {
  'facility:view': ['technician', 'engineer', 'safety-officer', 'manager', 'administrator'],
  'intake:take-in': ['technician', 'engineer'],
  'intake:ask-withdrawal': ['technician', 'engineer', 'administrator'],
  'intake:agree-withdrawal': ['engineer'],
  'intake:withdraw': ['administrator'],
  'reading:type': ['technician', 'engineer'],
  'entry:view': ['technician', 'engineer', 'safety-officer', 'manager', 'administrator', 'contributor'],
  'entry:write': ['technician', 'engineer', 'safety-officer', 'manager', 'administrator', 'contributor'],
  'segment-state:set': ['technician', 'engineer'],
  'register:propose': ['technician'],
  'register:edit': ['engineer', 'administrator'],
  'limit:edit': ['engineer'],
  'forecast:run': ['technician', 'engineer', 'safety-officer', 'manager', 'administrator'],
  'forecast:record': ['engineer'],
  'isolation-test:record': ['technician', 'engineer'],
  'isolation-test:accept': ['engineer'],
  'bake:plan': ['engineer'],
  'bake:prioritise': ['engineer', 'manager'],
  'bake:note': ['technician', 'engineer'],
  'permit:draft': ['technician', 'engineer'],
  'permit:approve': ['safety-officer'],
  'permit:stop': ['technician', 'engineer', 'safety-officer', 'manager', 'administrator', 'contributor'],
  'permit:lock': ['technician', 'engineer'],
  'permit:clear-lock': ['engineer', 'safety-officer'],
  'permit:test': ['technician', 'engineer', 'safety-officer'],
  'heating:state': ['technician', 'engineer', 'safety-officer'],
  'work:plan': ['technician', 'engineer', 'safety-officer'],
  'threshold:adopt': ['safety-officer'],
  'competence:edit': ['safety-officer', 'administrator'],
  'bay:release': ['safety-officer'],
  'retention:ask': ['administrator'],
  'retention:agree': ['safety-officer', 'engineer'],
  'clock:advance': ['administrator'],
  'people:view': ['administrator'],
  'people:edit': ['administrator'],
  'grant:confirm': ['safety-officer', 'manager', 'administrator'],
  'mail:view': ['administrator'],
} as const satisfies Record<string, readonly Role[]>

export type Permission = keyof typeof ROLES_BY_PERMISSION

export const PERMISSIONS = Object.keys(ROLES_BY_PERMISSION) as Permission[]

/** A role that approves what others plan. Its holder by their own grant is kept waiting for a day, for others to object. */
const APPROVING_ROLES: readonly Role[] = ['safety-officer']

/** Hours that pass between the confirmation of a role that somebody gave to themselves and its beginning. */
export function hoursAfterConfirmation(role: Role): number {
  return APPROVING_ROLES.includes(role) ? 24 : 0
}

/** A role held by a person from one instant until another (open when null). */
export interface Grant {
  role: Role
  startsAt: Date
  endsAt: Date | null
  revokedAt: Date | null
}

/** Roles in force at an instant. */
export function rolesAt(grants: readonly Grant[], at: Date): Role[] {
  const held = new Set<Role>()
  for (const grant of grants) {
    const ended = grant.endsAt !== null && grant.endsAt <= at
    const revoked = grant.revokedAt !== null && grant.revokedAt <= at
    if (grant.startsAt <= at && !ended && !revoked) held.add(grant.role)
  }
  return ROLES.filter((role) => held.has(role))
}

/** Whether one role carries a permission. */
export function roleHas(role: Role, permission: Permission): boolean {
  return (ROLES_BY_PERMISSION[permission] as readonly Role[]).includes(role)
}

/** Whether any of the roles carries a permission. */
export function rolesHave(roles: readonly Role[], permission: Permission): boolean {
  return roles.some((role) => roleHas(role, permission))
}

/** Labels of the roles that carry a permission, for a refusal that says who can help. */
export function whoMay(permission: Permission): string[] {
  return ROLES_BY_PERMISSION[permission].map((role) => ROLE_LABELS[role])
}
