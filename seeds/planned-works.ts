/** Work by others in the tunnel around the demo's morning. All invented. */
import type { DbOrTx } from '../app/db/client.server.ts'
import { plannedWork } from '../app/db/schema/index.ts'
import type { PlannedWorkKind, PlannedWorkState } from '../app/domain/permit-words.ts'
import { at } from './demo-time.ts'
import { PERSON_ID, type PersonKey } from './people.ts'
import { segmentOf } from './register/segments.ts'

interface DemoWork {
  kind: PlannedWorkKind
  title: string
  /** Where it is: a segment, all of it or a stretch; a stretch of the main line; or nowhere in particular. */
  segment?: string
  stretch?: [number, number]
  from: string
  to: string
  people: string
  state?: PlannedWorkState
  note?: string
  by: PersonKey
  madeAt: string
}

const WORKS: readonly DemoWork[] = [
  {
    kind: 'bay-work',
    title: 'Trays and cables for the new gauge controllers',
    stretch: [420, 620],
    from: '2026-10-19 07:00',
    to: '2026-10-22 17:00',
    people: 'Cabling crew of four, led in by Nerys Copperfield-Oyelaran',
    state: 'finished',
    by: 'bram',
    madeAt: '2026-10-12 10:00',
  },
  {
    kind: 'power-maintenance',
    title: 'Transformer house: oil samples, east feeder off for two hours',
    from: '2026-11-18 06:00',
    to: '2026-11-18 08:00',
    people: 'Two of the grid operator',
    note: 'Supplies and fans of the east half stop; monitors run on batteries',
    by: 'bram',
    madeAt: '2026-10-30 15:10',
  },
  {
    kind: 'lifting',
    title: 'Compressor for the cellar, over the rails at the crossing',
    segment: 'SG-02',
    stretch: [200, 240],
    from: '2026-10-28 09:00',
    to: '2026-10-28 12:00',
    people: 'Crane driver and two riggers',
    state: 'called-off',
    note: 'The compressor came a month late',
    by: 'corwin',
    madeAt: '2026-10-20 11:00',
  },
  {
    kind: 'leak-check',
    title: 'Spray at the east end of SG-06',
    segment: 'SG-06',
    stretch: [825, 900],
    from: '2026-11-09 13:00',
    to: '2026-11-09 17:00',
    people: 'Odalys Fennimore and Pim Larkspur',
    note: 'Only the half away from SG-05, which soaks at 150 °C',
    by: 'odalys',
    madeAt: '2026-11-06 16:20',
  },
  {
    kind: 'opening',
    title: 'New hot cathode at HC-14A',
    segment: 'SG-14',
    stretch: [1950, 1960],
    from: '2026-11-09 11:00',
    to: '2026-11-09 14:00',
    people: 'Corwin Ashgrove-Tull and Nerys Copperfield-Oyelaran',
    by: 'corwin',
    madeAt: '2026-11-05 12:00',
  },
  {
    kind: 'visit',
    title: 'Two school classes in the west portal hall',
    stretch: [0, 40],
    from: '2026-11-12 10:00',
    to: '2026-11-12 11:30',
    people: 'Forty pupils and four teachers with Magnus Underhay',
    by: 'ione',
    madeAt: '2026-11-02 09:00',
  },
  {
    kind: 'fire-detection-off',
    title: 'Detectors of bays 1 and 2 washed and tried',
    stretch: [0, 300],
    from: '2026-11-19 08:00',
    to: '2026-11-19 15:00',
    people: 'Two of the alarm firm',
    by: 'ione',
    madeAt: '2026-11-03 14:00',
  },
]

/** Writes the works. Those that lie near heat wait for an officer, as anything new does. */
export async function seedPlannedWorks(db: DbOrTx): Promise<number> {
  await db.insert(plannedWork).values(
    WORKS.map((one) => ({
      kind: one.kind,
      title: one.title,
      lineId: one.segment === undefined && one.stretch !== undefined ? 1 : null,
      segmentId: one.segment === undefined ? null : segmentOf(one.segment).id,
      fromM: one.stretch?.[0] ?? null,
      toM: one.stretch?.[1] ?? null,
      startsAt: at(one.from),
      endsAt: at(one.to),
      people: one.people,
      state: one.state ?? ('planned' as const),
      note: one.note ?? '',
      createdBy: PERSON_ID[one.by],
      createdAt: at(one.madeAt),
    })),
  )
  return WORKS.length
}
