/** People of the demo and the roles they hold or held. All invented. */
import { hashPassword } from '../app/auth/password.ts'
import type { DbOrTx } from '../app/db/client.server.ts'
import { person, roleGrant } from '../app/db/schema/index.ts'
import type { Role } from '../app/domain/roles.ts'
import { DEMO_SIGN_INS } from './demo-sign-ins.ts'
import { at, REGISTER_BEGAN } from './demo-time.ts'

interface DemoGrant {
  role: Role
  from?: string
  until?: string
  reason: string
}

interface DemoPerson {
  /** Short name used by the other seed files. */
  key: string
  name: string
  email: string | null
  note?: string
  endsAt?: string
  /** Only for people whose role is not offered on the sign-in page. */
  password?: string
  grants: readonly DemoGrant[]
}

const PEOPLE = [
  {
    key: 'juniper',
    name: 'Juniper Vance-Alder',
    email: 'juniper@qfl.example',
    grants: [{ role: 'administrator', reason: 'Set up the logbook' }],
  },
  {
    key: 'pim',
    name: 'Pim Larkspur',
    email: 'pim@qfl.example',
    note: 'Leads day crew A',
    grants: [{ role: 'technician', reason: 'Crew A' }],
  },
  {
    key: 'odalys',
    name: 'Odalys Fennimore',
    email: 'odalys@qfl.example',
    note: 'Crew A; leak hunting',
    grants: [{ role: 'technician', reason: 'Crew A' }],
  },
  {
    key: 'corwin',
    name: 'Corwin Ashgrove-Tull',
    email: 'corwin@qfl.example',
    note: 'Leads day crew B; on call at night in week 46',
    grants: [{ role: 'technician', reason: 'Crew B' }],
  },
  {
    key: 'nerys',
    name: 'Nerys Copperfield-Oyelaran',
    email: 'nerys@qfl.example',
    note: 'Crew B',
    grants: [{ role: 'technician', reason: 'Crew B' }],
  },
  {
    key: 'bram',
    name: 'Dr Bram Thistlewood',
    email: 'bram@qfl.example',
    note: 'Plans the bakes',
    grants: [
      { role: 'engineer', reason: 'Responsible for the vacuum of the flight path' },
      { role: 'technician', from: '2026-01-12 08:00', reason: 'Covers for the crews when one is ill' },
    ],
  },
  {
    key: 'ione',
    name: 'Ione Castellbrook',
    email: 'ione@qfl.example',
    grants: [{ role: 'safety-officer', reason: 'Appointed safety officer' }],
  },
  {
    key: 'rafe',
    name: 'Rafe Moonthorn',
    email: 'rafe@qfl.example',
    note: 'Covers for the safety officer from 18:00',
    grants: [
      { role: 'engineer', until: '2026-01-01 00:00', reason: 'Helped the vacuum engineer through 2025' },
      { role: 'safety-officer', from: '2026-01-01 00:00', reason: 'Deputy of the safety officer' },
    ],
  },
  {
    key: 'magnus',
    name: 'Magnus Underhay',
    email: 'magnus@qfl.example',
    grants: [{ role: 'manager', reason: 'Runs the facility' }],
  },
  {
    key: 'wendel',
    name: 'Wendel Quarrie',
    email: null,
    note: 'Licensed electrician. Does not sign in',
    grants: [],
  },
  {
    key: 'tove',
    name: 'Tove Brindlemark',
    email: 'tove@qfl.example',
    note: 'Contractor for insulation',
    endsAt: '2026-12-01 00:00',
    password: 'moss and mineral wool',
    grants: [
      {
        role: 'contributor',
        from: '2026-09-01 08:00',
        until: '2026-12-01 00:00',
        reason: 'Insulation of the 0.60 m tube, by contract until the end of November',
      },
    ],
  },
] as const satisfies readonly DemoPerson[]

export type PersonKey = (typeof PEOPLE)[number]['key']

/** Ids of the demo's people: the order of the list above, from 1. */
export const PERSON_ID = Object.fromEntries(PEOPLE.map(({ key }, index) => [key, index + 1])) as Record<
  PersonKey,
  number
>

/** Name of a person of the demo, by id. */
export function nameOf(id: number): string {
  const found = PEOPLE[id - 1]
  if (found === undefined) throw new Error(`The demo has no person ${id}`)
  return found.name
}

/** People who sign in without standing on the sign-in page share the password of the person offered for their role. */
function passwordOf({ email, grants, password }: DemoPerson): string | null {
  if (password !== undefined) return password
  const own = DEMO_SIGN_INS.find((offered) => offered.email === email)
  if (own !== undefined) return own.password
  const role = grants.at(-1)?.role
  return DEMO_SIGN_INS.find((offered) => offered.role === role)?.password ?? null
}

/** Writes people and grants. Passwords are hashed at full cost: the demo's accounts are real ones. */
export async function seedPeople(db: DbOrTx): Promise<number> {
  const people: readonly DemoPerson[] = PEOPLE
  const hashes = await Promise.all(
    people.map(async (one) => {
      const password = passwordOf(one)
      return password === null || one.email === null ? null : hashPassword(password)
    }),
  )
  await db.insert(person).values(
    people.map(({ name, email, note, endsAt }, index) => ({
      id: index + 1,
      name,
      email,
      passwordHash: hashes[index] ?? null,
      note: note ?? '',
      endsAt: endsAt === undefined ? null : at(endsAt),
      createdAt: REGISTER_BEGAN,
    })),
  )
  await db.insert(roleGrant).values(
    people.flatMap(({ grants }, index) =>
      grants.map(({ role, from, until, reason }) => ({
        personId: index + 1,
        role,
        startsAt: from === undefined ? REGISTER_BEGAN : at(from),
        endsAt: until === undefined ? null : at(until),
        grantedBy: PERSON_ID.juniper,
        grantedAt: from === undefined ? REGISTER_BEGAN : at(from),
        reason,
      })),
    ),
  )
  return people.length
}
