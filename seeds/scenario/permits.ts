/** Heated-segment permits of fourteen months, the newest in full. Raw material: windows agree with the bakes. */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'

export type PermitState = 'draft' | 'requested' | 'refused' | 'withdrawn' | 'lapsed' | 'issued' | 'cancelled'

export interface PermitPause {
  fromAt: Date
  untilAt: Date
  reason: string
}

export interface IsolationPoint {
  point: string
  isolates: string
  required: string
  lock: string
  appliedBy: PersonKey
  appliedAt: Date
  verifiedBy: PersonKey
  verifiedAt: Date
  /** Enters the step of somebody who does not sign in. */
  witness?: PersonKey
}

export interface DemoPermit {
  number: string
  segments: readonly string[]
  work: string
  state: PermitState
  requestedBy: PersonKey
  holder: PersonKey
  /** Null where nobody approved it. */
  approvedBy: PersonKey | null
  /** Null in a draft. */
  window: { fromAt: Date; untilAt: Date } | null
  /** End of the window before it was extended. */
  extendedFrom?: Date
  suspensions: readonly PermitPause[]
  /** Ran out while the heating was on. */
  expiredLiveAt?: Date
  handBackRefused?: string
  refusal?: string
  deputy?: PersonKey
  currentUntil?: Date
  locks?: readonly string[]
  points?: readonly IsolationPoint[]
  pointsOfInterest?: readonly string[]
}

const from = (start: string, end: string) => ({ fromAt: at(start), untilAt: at(end) })
const pause = (start: string, end: string, reason: string): PermitPause => ({ ...from(start, end), reason })

type Short = [
  number: string,
  segment: string,
  work: string,
  start: string,
  end: string,
  holder: PersonKey,
  approvedBy: PersonKey,
  more?: Partial<DemoPermit>,
]

/** Bakes and the small jobs with heat: blankets on a cross, drying of a vented end, trials of a supply set. */
const CLOSED: readonly Short[] = [
  ['2025-040', 'SG-08', 'Trial of HX-2 at 50 %', '2025-09-09 08:00', '2025-09-09 17:00', 'corwin', 'ione'],
  ['2025-041', 'SG-12', 'Blanket on the cross, 80 °C', '2025-09-10 07:00', '2025-09-11 18:00', 'pim', 'ione'],
  ['2025-042', 'SG-02', 'Blanket on VB-02, 90 °C', '2025-09-17 07:00', '2025-09-18 18:00', 'corwin', 'ione'],
  ['2025-043', 'SG-07', 'Trial of HX-1 at 10 %', '2025-10-01 08:00', '2025-10-01 17:00', 'odalys', 'ione'],
  [
    '2025-044',
    'SG-15',
    'Drying of the west end, 60 °C',
    '2025-10-21 07:00',
    '2025-10-22 18:00',
    'pim',
    'ione',
  ],
  [
    '2025-045',
    'SG-15',
    'Bake at 150 °C',
    '2025-11-03 06:00',
    '2025-11-12 18:00',
    'pim',
    'ione',
    {
      suspensions: [pause('2025-11-06 10:15', '2025-11-06 11:05', 'Smoke detector of bay 14 out of order')],
    },
  ],
  ['2025-046', 'SG-04', 'Blanket on PV-04, 70 °C', '2025-12-08 07:00', '2025-12-08 18:00', 'nerys', 'ione'],
  [
    '2025-047',
    'SG-09',
    'Trial of the over-temperature cut-out',
    '2025-12-15 08:00',
    '2025-12-15 16:00',
    'corwin',
    'ione',
  ],
  [
    '2026-001',
    'SG-13',
    'Blanket on the cross, 80 °C',
    '2026-01-13 07:00',
    '2026-01-14 18:00',
    'nerys',
    'ione',
  ],
  [
    '2026-002',
    'SG-06',
    'Drying after the vent, 60 °C',
    '2026-01-26 07:00',
    '2026-01-28 18:00',
    'corwin',
    'rafe',
  ],
  ['2026-003', 'SG-06', 'Bake at 150 °C', '2026-02-04 06:00', '2026-02-13 18:00', 'corwin', 'ione'],
  ['2026-004', 'SG-01', 'Blanket on VB-00, 90 °C', '2026-02-18 07:00', '2026-02-19 18:00', 'pim', 'ione'],
  ['2026-005', 'SG-12', 'Blanket on CC-12, 70 °C', '2026-02-25 07:00', '2026-02-25 18:00', 'odalys', 'ione'],
  ['2026-006', 'SG-10', 'Trial of HX-3 at 10 %', '2026-03-04 08:00', '2026-03-04 17:00', 'nerys', 'rafe'],
  [
    '2026-007',
    'SG-03',
    'Blanket on the cross, 80 °C',
    '2026-03-16 07:00',
    '2026-03-18 18:00',
    'corwin',
    'ione',
    {
      suspensions: [
        pause(
          '2026-03-17 09:14',
          '2026-03-17 13:30',
          'Power dip: heaters off until all supplies were proven',
        ),
      ],
    },
  ],
  ['2026-008', 'SG-02', 'Blanket on CC-02, 70 °C', '2026-03-23 07:00', '2026-03-23 18:00', 'odalys', 'ione'],
  ['2026-009', 'SG-13', 'Blanket on NV-13, 80 °C', '2026-04-14 07:00', '2026-04-15 18:00', 'pim', 'ione'],
  [
    '2026-010',
    'SP-1',
    'Drying of the cellar end, 60 °C',
    '2026-04-21 07:00',
    '2026-04-22 18:00',
    'nerys',
    'rafe',
  ],
  [
    '2026-011',
    'SG-07',
    'Blanket on VB-07, 90 °C',
    '2026-05-05 07:00',
    '2026-05-06 16:00',
    'pim',
    'ione',
    {
      expiredLiveAt: at('2026-05-06 16:00'),
    },
  ],
  ['2026-012', 'SG-09', 'Bake at 150 °C', '2026-05-20 06:00', '2026-05-29 18:00', 'nerys', 'ione'],
  [
    '2026-013',
    'SG-16',
    'Blanket on the cross, 80 °C',
    '2026-06-03 07:00',
    '2026-06-04 18:00',
    'corwin',
    'ione',
  ],
  ['2026-014', 'SG-05', 'Trial of HX-2 at 10 %', '2026-06-10 08:00', '2026-06-10 17:00', 'odalys', 'ione'],
  ['2026-015', 'SG-08', 'Blanket on VB-08, 90 °C', '2026-06-17 07:00', '2026-06-18 18:00', 'pim', 'rafe'],
  [
    '2026-016',
    'SG-11',
    'Trial of the over-temperature cut-out',
    '2026-06-24 08:00',
    '2026-06-24 16:00',
    'nerys',
    'ione',
  ],
  [
    '2026-017',
    'SG-14',
    'Blanket on the cross, 80 °C',
    '2026-07-01 07:00',
    '2026-07-02 18:00',
    'odalys',
    'ione',
  ],
  [
    '2026-018',
    'SG-14',
    'Bake at 150 °C',
    '2026-07-15 06:00',
    '2026-07-24 18:00',
    'odalys',
    'ione',
    {
      suspensions: [
        pause(
          '2026-07-17 15:40',
          '2026-07-18 07:30',
          'Spread over 30 °C: heating off, insulation to be looked at',
        ),
      ],
    },
  ],
  ['2026-019', 'SG-01', 'Blanket on VB-01, 90 °C', '2026-07-28 07:00', '2026-07-29 18:00', 'corwin', 'rafe'],
  ['2026-020', 'SG-12', 'Blanket on VB-12, 70 °C', '2026-08-04 07:00', '2026-08-05 18:00', 'nerys', 'ione'],
  ['2026-021', 'SG-03', 'Trial of HX-1 at 50 %', '2026-08-11 08:00', '2026-08-11 17:00', 'pim', 'ione'],
  [
    '2026-023',
    'SG-10',
    'Drying after the weld, 60 °C',
    '2026-08-31 07:00',
    '2026-09-01 18:00',
    'corwin',
    'ione',
  ],
]

function closed([number, segment, work, start, end, holder, approvedBy, more]: Short): DemoPermit {
  return {
    number: `HSP-${number}`,
    segments: [segment],
    work,
    state: 'cancelled',
    requestedBy: 'bram',
    holder,
    approvedBy,
    window: from(start, end),
    suspensions: [],
    ...more,
  }
}

const plain = (
  number: string,
  segments: readonly string[],
  work: string,
  one: Pick<DemoPermit, 'state' | 'holder'> & Partial<DemoPermit>,
): DemoPermit => ({
  number,
  segments,
  work,
  requestedBy: 'bram',
  approvedBy: null,
  window: null,
  suspensions: [],
  ...one,
})

/** Applied and verified on the same day, the times as written at the points. */
function point(
  name: string,
  isolates: string,
  required: string,
  lock: string,
  applied: [PersonKey, string],
  verified: [PersonKey, string],
): IsolationPoint {
  const day = '2026-11-04'
  return {
    point: name,
    isolates,
    required,
    lock,
    appliedBy: applied[0],
    appliedAt: at(`${day} ${applied[1]}`),
    verifiedBy: verified[0],
    verifiedAt: at(`${day} ${verified[1]}`),
    ...(applied[0] === 'wendel' ? { witness: 'odalys' as const } : {}),
  }
}

const POINTS_SG05: readonly IsolationPoint[] = [
  point('IP-05-1', 'NV-05, vent valve', 'shut', 'L-114', ['odalys', '16:05'], ['pim', '16:20']),
  point('IP-05-2', 'GV-04', 'shut', 'L-115', ['odalys', '16:10'], ['pim', '16:22']),
  point('IP-05-3', 'GV-05', 'shut', 'L-116', ['odalys', '16:12'], ['pim', '16:24']),
  point(
    'IP-05-4',
    'Spare feed of HX-2 to the bars of SG-05',
    'link out, end of the HX-2 cable earthed and covered; HX-1 keeps the bars themselves live',
    'L-117',
    ['wendel', '16:30'],
    ['corwin', '16:41'],
  ),
  point(
    'IP-05-5',
    'BH-06, blanket next door',
    'breaker off',
    'L-118',
    ['wendel', '16:33'],
    ['corwin', '16:43'],
  ),
  point(
    'IP-05-6',
    'Crane over 600 to 760 m',
    'key withdrawn',
    'L-119',
    ['pim', '16:50'],
    ['odalys', '16:55'],
  ),
]

const RECENT: readonly DemoPermit[] = [
  plain('HSP-2026-022', ['SG-04'], 'Blanket on the cross, 80 °C', {
    state: 'lapsed',
    holder: 'corwin',
    approvedBy: 'ione',
    window: from('2026-08-18 07:00', '2026-08-19 18:00'),
  }),
  plain('HSP-2026-024', ['SG-16'], 'Blanket on VB-16, 90 °C', {
    state: 'withdrawn',
    holder: 'nerys',
    window: from('2026-09-08 07:00', '2026-09-09 18:00'),
  }),
  closed([
    '2026-025',
    'SG-01',
    'Blanket on HC-01A, 70 °C',
    '2026-09-28 07:00',
    '2026-09-28 18:00',
    'nerys',
    'ione',
  ]),
  closed([
    '2026-026',
    'SG-07',
    'Blanket on TC-07, 70 °C',
    '2026-10-09 07:00',
    '2026-10-09 18:00',
    'corwin',
    'ione',
  ]),
  closed([
    '2026-027',
    'SG-08',
    'Trial of HX-2 at 10 %',
    '2026-10-27 08:00',
    '2026-10-27 17:00',
    'nerys',
    'ione',
  ]),
  plain('HSP-2026-028', ['SG-04'], 'Blanket on VB-04, 80 °C', {
    state: 'refused',
    holder: 'corwin',
    window: from('2026-10-20 07:00', '2026-10-21 18:00'),
    refusal: 'Cabling crew in the bay',
  }),
  plain('HSP-2026-029', ['SG-10'], 'Bake at 150 °C', {
    state: 'cancelled',
    holder: 'corwin',
    approvedBy: 'ione',
    window: from('2026-09-07 06:00', '2026-09-16 18:00'),
    extendedFrom: at('2026-09-16 06:00'),
    suspensions: [pause('2026-09-11 11:20', '2026-09-11 14:20', 'Fan of the supply set failed')],
    handBackRefused: 'Covers of the bars not yet back on; handed back again two hours later',
  }),
  plain('HSP-2026-030', ['SG-08'], 'Bake at 150 °C', {
    state: 'issued',
    holder: 'corwin',
    deputy: 'nerys',
    approvedBy: 'ione',
    window: from('2026-10-31 06:00', '2026-11-10 18:00'),
    extendedFrom: at('2026-11-10 06:00'),
    currentUntil: at('2026-11-09 18:00'),
    locks: ['L-104', 'L-105', 'L-106', 'L-107', 'L-108', 'L-109'],
    pointsOfInterest: ['Heating off since 2026-11-08 23:30, cooling', 'L-109 is on the output of HX-2'],
  }),
  plain('HSP-2026-031', ['SG-05'], 'Bake at 150 °C', {
    state: 'issued',
    holder: 'pim',
    deputy: 'corwin',
    approvedBy: 'ione',
    window: from('2026-11-04 06:00', '2026-11-13 18:00'),
    currentUntil: at('2026-11-09 18:00'),
    locks: POINTS_SG05.map(({ lock }) => lock),
    points: POINTS_SG05,
  }),
  plain('HSP-2026-032', ['SG-11', 'SG-12'], 'Bake at 150 °C as a pair in series', {
    state: 'requested',
    holder: 'pim',
    window: from('2026-11-16 06:00', '2026-11-25 18:00'),
    pointsOfInterest: [
      'Licence of the electrician runs out within the window',
      'Elastomer bonnet of GV-12 between SG-12 and SG-13: 120 °C at most',
      'The isolated test of SG-11 was voided after the request: a filament came on in the middle of it',
      'Over 50 V at the end of the ramp',
      'Planned by Bram Thistlewood, who may not approve it',
    ],
  }),
  plain('HSP-2026-033', ['SG-16'], '', { state: 'draft', holder: 'nerys' }),
]

/** All of them, in order of their numbers. */
export const PERMITS: readonly DemoPermit[] = [...CLOSED.map(closed), ...RECENT].sort((a, b) =>
  a.number.localeCompare(b.number),
)

/** Licence of the electrician who has no sign-in. */
export const ELECTRICIAN_LICENCE = {
  person: 'wendel',
  number: 'QE-1187',
  endsAt: at('2026-11-21 00:00'),
} as const
