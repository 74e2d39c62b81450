/** Competences and licences of the demo's people. All invented. */
import type { DbOrTx } from '../app/db/client.server.ts'
import { competence } from '../app/db/schema/index.ts'
import type { CompetenceKind } from '../app/domain/permit-words.ts'
import { at, REGISTER_BEGAN } from './demo-time.ts'
import { PERSON_ID, type PersonKey } from './people.ts'
import { ELECTRICIAN_LICENCE } from './scenario/permits.ts'

interface DemoCompetence {
  person: PersonKey
  kind: CompetenceKind
  number: string
  from: string
  /** First instant at which it no longer holds. */
  until: Date
  note: string
}

const COURSE = 'Certificate of the two-day course and the yearly walk along the tunnel'

/** All four hold permits for one another; the course is taken every two years, in two groups. */
const HOLDERS: readonly DemoCompetence[] = (
  [
    ['pim', 'PH-21', '2025-04-02', '2027-04-02'],
    ['corwin', 'PH-22', '2025-04-02', '2027-04-02'],
    ['odalys', 'PH-25', '2025-06-11', '2027-06-11'],
    ['nerys', 'PH-26', '2025-06-11', '2027-06-11'],
  ] as const
).map(([person, number, from, until]) => ({
  person,
  kind: 'permit-holder',
  number,
  from,
  until: at(until),
  note: COURSE,
}))

const ISOLATORS: readonly DemoCompetence[] = (
  [
    ['pim', 'IS-11'],
    ['odalys', 'IS-12'],
    ['corwin', 'IS-13'],
    ['nerys', 'IS-14'],
    ['wendel', 'IS-15'],
  ] as const
).map(([person, number]) => ({
  person,
  kind: 'isolation',
  number,
  from: '2025-03-10',
  until: at('2028-03-10'),
  note: 'Trained on the locks and the lock box of this site, practised with each',
}))

const OTHERS: readonly DemoCompetence[] = [
  {
    person: ELECTRICIAN_LICENCE.person,
    kind: 'electrician-licence',
    number: ELECTRICIAN_LICENCE.number,
    from: '2021-11-21',
    until: ELECTRICIAN_LICENCE.endsAt,
    note: 'Licence card, both sides; renewal has been applied for',
  },
  ...(['pim', 'odalys', 'corwin', 'nerys', 'ione'] as const).map(
    (person): DemoCompetence => ({
      person,
      kind: 'oxygen-test',
      number: '',
      from: '2025-05-05',
      until: at('2027-05-05'),
      note: 'Shown with two meters by the maker’s fitter',
    }),
  ),
  ...(['odalys', 'nerys'] as const).map(
    (person): DemoCompetence => ({
      person,
      kind: 'attendant',
      number: '',
      from: '2025-02-17',
      until: at('2027-02-17'),
      note: 'Fire watch drill with the site’s brigade',
    }),
  ),
  ...(['pim', 'corwin'] as const).map(
    (person): DemoCompetence => ({
      person,
      kind: 'first-aid',
      number: '',
      from: '2024-12-02',
      until: at('2026-12-02'),
      note: 'Sixteen hours, with burns and suspected oxygen shortage',
    }),
  ),
]

/** Writes what the demo's people may do, as the safety officer entered it when the register was first filled in. */
export async function seedCompetences(db: DbOrTx): Promise<number> {
  const all = [...HOLDERS, ...ISOLATORS, ...OTHERS]
  await db.insert(competence).values(
    all.map(({ person, kind, number, from, until, note }) => ({
      personId: PERSON_ID[person],
      kind,
      number,
      startsAt: at(from),
      endsAt: until,
      enteredBy: PERSON_ID.ione,
      enteredAt: REGISTER_BEGAN,
      note,
    })),
  )
  return all.length
}
