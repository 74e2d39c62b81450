/**
 * The sign-ins that a demo offers, one for each role. They are no secret: a real site starts without them, and every
 * person of the demo is invented.
 */
import type { Role } from '../app/domain/roles.ts'

export const DEMO_SIGN_INS: readonly { name: string; email: string; role: Role; password: string }[] = [
  { name: 'Pim Larkspur', email: 'pim@qfl.example', role: 'technician', password: 'larks over the heath' },
  {
    name: 'Dr Bram Thistlewood',
    email: 'bram@qfl.example',
    role: 'engineer',
    password: 'thistles by the tunnel',
  },
  {
    name: 'Ione Castellbrook',
    email: 'ione@qfl.example',
    role: 'safety-officer',
    password: 'castle above the brook',
  },
  {
    name: 'Magnus Underhay',
    email: 'magnus@qfl.example',
    role: 'manager',
    password: 'hay under the rafters',
  },
  {
    name: 'Juniper Vance-Alder',
    email: 'juniper@qfl.example',
    role: 'administrator',
    password: 'alder and juniper',
  },
]
