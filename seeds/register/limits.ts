/** Limits and targets of the demo, each with its date and reason. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { limitValue } from '../../app/db/schema/index.ts'
import { LIMIT_KIND_FACTS, type LimitKind } from '../../app/domain/register.ts'
import { at, REGISTER_BEGAN } from '../demo-time.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'
import { SEGMENTS } from './segments.ts'

interface DemoLimit {
  kind: LimitKind
  value: number
  reason: string
  segmentId?: number
  from?: string
  until?: string
  by?: PersonKey
}

const TIMING = 'Collisions with the rest gas blur the timing above this'
const STEEL = 'Usual bake of this line'
const GRID = 'Agreed with the grid operator of the site'

const LIMITS: readonly DemoLimit[] = [
  { kind: 'target', value: 2e-7, reason: TIMING },
  { kind: 'operating-limit', value: 2e-6, reason: 'Timing runs are called off above this' },
  { kind: 'air-leak', value: 1e-8, reason: 'A tenth of what the pump of a segment can carry for years' },
  { kind: 'isolation-rise', value: 1e-5, reason: 'Hydrogen of a baked 0.60 m tube, with room to spare' },
  ...SEGMENTS.filter(({ diameterM }) => diameterM === 0.5).map(({ id }) => ({
    kind: 'isolation-rise' as const,
    segmentId: id,
    value: 1.2e-5,
    reason: 'A narrower tube has more wall for its volume',
  })),
  { kind: 'bake-temperature', value: 150, reason: STEEL },
  { kind: 'bake-tolerance', value: 10, reason: STEEL },
  { kind: 'bake-hours', value: 168, reason: STEEL },
  { kind: 'ramp-rate', value: 10, reason: 'Bellows and guides settle evenly at this rate' },
  {
    kind: 'temperature-spread',
    value: 20,
    reason: 'Above this the tube bows between its guides',
    by: 'bram',
  },
  { kind: 'bake-hold-pressure', value: 1e-2, reason: 'Top of the range of the hot cathodes' },
  { kind: 'bake-abort-pressure', value: 0.1, reason: 'The carts are not to work above this for long' },
  { kind: 'touch-limit', value: 40, reason: 'Bare hands', by: 'ione' },
  { kind: 'exclusion-length', value: 10, reason: 'Ruling of the safety officer', by: 'ione' },
  { kind: 'exclusion-temperature', value: 60, reason: 'Ruling of the safety officer', by: 'ione' },
  { kind: 'power-cap-day', value: 200, reason: GRID },
  { kind: 'power-cap-night', value: 260, reason: GRID },
  { kind: 'power-base', value: 18, reason: 'Fans, carts and lights, measured' },
  { kind: 'feeder-west', value: 140, reason: 'Rating of the cable' },
  { kind: 'feeder-east', value: 160, reason: 'Rating of the cable' },
  { kind: 'oxygen-low', value: 19.5, reason: 'Alarm of the fixed monitors', by: 'ione' },
  { kind: 'oxygen-high', value: 23.5, reason: 'Alarm of the fixed monitors', by: 'ione' },
  { kind: 'oxygen-release', value: 20, reason: 'Tunnel is given free at this', by: 'ione' },
  {
    kind: 'available-at-target',
    value: 12,
    until: '2026-04-01',
    reason: 'While SG-09 and SG-10 were still on carts',
  },
  { kind: 'available-at-target', value: 14, from: '2026-04-01', reason: 'Two segments may lag behind' },
]

/** Writes the limits. */
export async function seedLimits(db: DbOrTx): Promise<number> {
  await db.insert(limitValue).values(
    LIMITS.map(({ kind, value, reason, segmentId, from, until, by }) => ({
      kind,
      segmentId: segmentId ?? null,
      value,
      unit: LIMIT_KIND_FACTS[kind].unit,
      startsAt: from === undefined ? REGISTER_BEGAN : at(from),
      endsAt: until === undefined ? null : at(until),
      reason,
      setBy: PERSON_ID[by ?? 'bram'],
      recordedAt: from === undefined ? REGISTER_BEGAN : at(from),
    })),
  )
  return LIMITS.length
}
