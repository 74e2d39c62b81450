/** States of the segments: where each stands when the demo clock starts, and how it came there. */
import type { DbOrTx } from '../app/db/client.server.ts'
import { segmentState } from '../app/db/schema/index.ts'
import type { SegmentState } from '../app/domain/segment-states.ts'
import { at, REGISTER_BEGAN } from './demo-time.ts'
import { PERSON_ID, type PersonKey } from './people.ts'
import { SEGMENTS, segmentOf } from './register/segments.ts'

interface Step {
  state: SegmentState
  since: string
  reason: string
  by: PersonKey
}

const FIRST: Omit<Step, 'since'> = {
  state: 'in-service',
  reason: 'In service when the register was begun',
  by: 'bram',
}

/** Changes after the first state, oldest first. Segments without an entry have been in service all along. */
const STEPS: Record<string, readonly Step[]> = {
  'SG-05': [
    {
      state: 'bake-prep',
      since: '2026-11-02 07:30',
      reason: 'Contact bars, thermocouples and blankets for the bake',
      by: 'pim',
    },
    { state: 'heating', since: '2026-11-04 20:00', reason: 'HX-1 on, ten degrees an hour', by: 'corwin' },
    { state: 'soak', since: '2026-11-05 09:12', reason: 'All twelve thermocouples above 140 °C', by: 'pim' },
  ],
  'SG-06': [
    {
      state: 'bake-prep',
      since: '2026-02-02 07:30',
      reason: 'Bake before the spring timing runs',
      by: 'bram',
    },
    { state: 'heating', since: '2026-02-04 18:00', reason: 'HX-2 on', by: 'corwin' },
    { state: 'soak', since: '2026-02-05 07:40', reason: 'Inside the band', by: 'pim' },
    { state: 'cooling', since: '2026-02-12 08:00', reason: 'A week of soak done', by: 'pim' },
    {
      state: 'post-bake-test',
      since: '2026-02-13 10:00',
      reason: 'Below 40 °C, on its own pump',
      by: 'odalys',
    },
    {
      state: 'in-service',
      since: '2026-02-16 09:00',
      reason: 'Three quiet nights at 5×10⁻⁸ Pa',
      by: 'bram',
    },
    {
      state: 'leak-hunt',
      since: '2026-10-31 09:15',
      reason: 'Step of all three gauges in the night, the east end most; argon grows',
      by: 'odalys',
    },
  ],
  'SG-08': [
    { state: 'bake-prep', since: '2026-10-28 07:30', reason: 'Being fitted for the bake', by: 'pim' },
    { state: 'heating', since: '2026-11-01 10:20', reason: 'HX-2 on; pair on call came in', by: 'corwin' },
    { state: 'soak', since: '2026-11-01 23:30', reason: 'Inside the band along the whole tube', by: 'nerys' },
    { state: 'cooling', since: '2026-11-08 23:30', reason: 'A week of soak done, HX-2 off', by: 'corwin' },
  ],
  'SG-10': [
    { state: 'bake-prep', since: '2026-09-03 07:30', reason: 'Next in the bake plan', by: 'bram' },
    { state: 'heating', since: '2026-09-07 17:00', reason: 'HX-3 on', by: 'corwin' },
    { state: 'soak', since: '2026-09-08 06:30', reason: 'Inside the band', by: 'nerys' },
    {
      state: 'cooling',
      since: '2026-09-15 09:30',
      reason: 'Soak done, with three hours more for the stop',
      by: 'pim',
    },
    { state: 'post-bake-test', since: '2026-09-16 11:00', reason: 'Cold; isolated over night', by: 'odalys' },
    {
      state: 'in-service',
      since: '2026-09-18 09:00',
      reason: 'Rise of pressure within the limit',
      by: 'bram',
    },
  ],
  'SG-11': [
    {
      state: 'vented',
      since: '2026-10-26 08:10',
      reason: 'Air, to exchange the bellows at the west end',
      by: 'pim',
    },
    { state: 'roughing', since: '2026-11-06 09:40', reason: 'Closed up; RS-2 on the port', by: 'pim' },
    { state: 'pumping', since: '2026-11-06 14:00', reason: 'Crossed over to MC-B at 4 Pa', by: 'pim' },
  ],
  'SG-12': [
    {
      state: 'bake-prep',
      since: '2026-11-06 13:00',
      reason: 'Being made ready for a series bake with SG-11',
      by: 'bram',
    },
  ],
  'SG-13': [
    {
      state: 'isolated-test',
      since: '2026-11-08 20:00',
      reason: 'Pump port PV-13 shut to see how fast it rises',
      by: 'corwin',
    },
  ],
  'SG-14': [
    {
      state: 'vented',
      since: '2026-11-05 07:30',
      reason: 'Dry nitrogen, to exchange gauge HC-14A; GV-13 and GV-14 locked',
      by: 'pim',
    },
  ],
  'SP-1': [
    {
      state: 'vented',
      since: '2026-10-28 08:45',
      reason: 'Dry nitrogen, for the new window in the cellar',
      by: 'odalys',
    },
    {
      state: 'roughing',
      since: '2026-11-09 07:40',
      reason: 'RS-1 at the far end, because the root stands beside the hot SG-08',
      by: 'pim',
    },
  ],
}

/** SG-11 has never been baked and so never been in service. */
const FIRST_OF: Record<string, Omit<Step, 'since'>> = {
  'SG-11': { state: 'pumping', reason: 'On a cart since assembly, never baked', by: 'bram' },
}

/** Writes the states: one open row a segment, the earlier ones ended where the next begins. */
export async function seedSegmentStates(db: DbOrTx): Promise<number> {
  const rows = SEGMENTS.flatMap(({ tag }) => {
    const first = { ...(FIRST_OF[tag] ?? FIRST), since: REGISTER_BEGAN }
    const steps = [first, ...(STEPS[tag] ?? []).map((step) => ({ ...step, since: at(step.since) }))]
    return steps.map(({ state, since, reason, by }, index) => ({
      segmentId: segmentOf(tag).id,
      state,
      since,
      endedAt: steps[index + 1]?.since ?? null,
      reason,
      setBy: PERSON_ID[by],
      recordedAt: since,
    }))
  })
  await db.insert(segmentState).values(rows)
  return rows.length
}
