/** States of the segments: where each stands when the demo clock starts, and how it came there. */
import type { DbOrTx } from '../app/db/client.server.ts'
import { segmentState } from '../app/db/schema/index.ts'
import type { SegmentState } from '../app/domain/segment-states.ts'
import { at, REGISTER_BEGAN } from './demo-time.ts'
import { PERSON_ID, type PersonKey } from './people.ts'
import { SEGMENTS, segmentOf } from './register/segments.ts'
import { bakesOf, type DemoBake } from './scenario/bakes.ts'
import { ISOLATIONS, VENTS } from './scenario/events.ts'

interface Step {
  state: SegmentState
  since: Date
  reason: string
  by: PersonKey
}

const FIRST: Omit<Step, 'since'> = {
  state: 'in-service',
  reason: 'In service when the register was begun',
  by: 'bram',
}

/** SG-11 has never been baked and so never been in service. */
const FIRST_OF: Record<string, Omit<Step, 'since'>> = {
  'SG-11': { state: 'pumping', reason: 'On a cart since assembly, never baked', by: 'bram' },
}

/** Changes that belong to no bake and no vent. */
const OTHER_STEPS: Record<string, readonly Step[]> = {
  'SG-06': [
    {
      state: 'leak-hunt',
      since: at('2026-10-31 09:15'),
      reason: 'Step of all three gauges in the night, the east end most; argon grows',
      by: 'odalys',
    },
  ],
  'SG-10': [
    {
      state: 'leak-hunt',
      since: at('2026-08-19 11:40'),
      reason: 'All gauges of the segment above their limit within the hour',
      by: 'pim',
    },
  ],
  'SG-11': isolated('SG-11', 'pumping'),
  'SG-16': isolated('SG-16', 'in-service'),
  'SG-12': [
    ...isolated('SG-12', 'in-service'),
    {
      state: 'bake-prep',
      since: at('2026-11-06 13:00'),
      reason: 'Being made ready for a series bake with SG-11',
      by: 'bram',
    },
  ],
  'SG-13': [
    {
      state: 'isolated-test',
      since: at('2026-11-08 20:00'),
      reason: 'Pump port PV-13 shut to see how fast it rises',
      by: 'corwin',
    },
  ],
}

/** Pump port shut for a night, and open again. */
function isolated(segment: string, before: SegmentState): Step[] {
  return ISOLATIONS.filter((one) => one.segment === segment).flatMap(({ fromAt, untilAt }) => [
    {
      state: 'isolated-test' as const,
      since: fromAt,
      reason: 'Pump port shut to see how fast it rises',
      by: 'odalys' as const,
    },
    ...(untilAt === null
      ? []
      : [{ state: before, since: untilAt, reason: 'Pump port open again', by: 'bram' as const }]),
  ])
}

/** What each bake was broken off for, or why its soak ended. */
const OFF_REASON: Record<DemoBake['outcome'], string> = {
  running: 'A week of soak done, heating off',
  complete: 'A week of soak done',
  'supply trip': 'Supply tripped in the ramp; bake given up',
  spread: 'Spread of more than 30 °C; bake given up',
}

const AFTER_REASON: Record<DemoBake['outcome'], string> = {
  running: '',
  complete: 'Rise of pressure within the limit, three quiet nights',
  'supply trip': 'As good as before the try; goes back to the plan',
  spread: 'As good as before the try; insulation to be renewed first',
}

function bakeSteps(segment: string): Step[] {
  return bakesOf(segment).flatMap((bake) => {
    const { prepAt, rampAt, soakAt, offAt, coldAt, inServiceAt, lead, second } = bake
    const soak = { state: 'soak' as const, reason: 'Inside the band along the whole tube', by: second }
    const off = { state: 'cooling' as const, reason: OFF_REASON[bake.outcome], by: lead }
    const cold = { state: 'post-bake-test' as const, reason: 'Below 40 °C, on its own pump', by: second }
    const done = { state: 'in-service' as const, reason: AFTER_REASON[bake.outcome], by: 'bram' as const }
    return [
      {
        state: 'bake-prep',
        since: prepAt,
        reason: 'Bars, thermocouples and blankets for the bake',
        by: lead,
      },
      { state: 'heating', since: rampAt, reason: bake.rampReason, by: lead },
      ...(soakAt === null ? [] : [{ ...soak, since: soakAt }]),
      ...(offAt === null ? [] : [{ ...off, since: offAt }]),
      ...(coldAt === null ? [] : [{ ...cold, since: coldAt }]),
      ...(inServiceAt === null ? [] : [{ ...done, since: inServiceAt }]),
    ] satisfies Step[]
  })
}

function ventSteps(segment: string): Step[] {
  return VENTS.filter((one) => one.segment === segment).flatMap((vent) => [
    { state: 'vented' as const, since: vent.ventedAt, reason: vent.reason, by: vent.by },
    ...(vent.roughingAt === null
      ? []
      : [
          {
            state: 'roughing' as const,
            since: vent.roughingAt,
            reason: ROUGHING_REASON[segment] ?? `Closed up; ${vent.roughingSet} on the port`,
            by: 'pim' as const,
          },
        ]),
    ...(vent.pumpingAt === null
      ? []
      : [
          {
            state: 'pumping' as const,
            since: vent.pumpingAt,
            reason: 'Crossed over to a cart at 4 Pa',
            by: vent.by,
          },
        ]),
  ])
}

const ROUGHING_REASON: Record<string, string> = {
  'SP-1': 'RS-1 at the far end, because the root stands beside the hot SG-08',
}

/** States of a segment, oldest first. */
export function stepsOf(segment: string): Step[] {
  const later = [...bakeSteps(segment), ...ventSteps(segment), ...(OTHER_STEPS[segment] ?? [])]
  const first = { ...(FIRST_OF[segment] ?? FIRST), since: REGISTER_BEGAN }
  return [first, ...later.sort((a, b) => a.since.getTime() - b.since.getTime())]
}

/** Writes the states: one open row a segment, the earlier ones ended where the next begins. */
export async function seedSegmentStates(db: DbOrTx): Promise<number> {
  const rows = SEGMENTS.flatMap(({ tag }) => {
    const steps = stepsOf(tag)
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
