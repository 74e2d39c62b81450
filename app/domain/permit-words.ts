/** Words of heated-segment permits that tables, rules and pages share. */

export const PERMIT_STATES = [
  'draft',
  'requested',
  'returned',
  'refused',
  'approved',
  'issued',
  'suspended',
  'expired',
  'handed-back',
  'cancelled',
  'lapsed',
  'withdrawn',
  'discarded',
] as const
export type PermitState = (typeof PERMIT_STATES)[number]

export const PERMIT_STATE_LABELS: Record<PermitState, string> = {
  draft: 'Draft',
  requested: 'Requested',
  returned: 'Returned',
  refused: 'Refused',
  approved: 'Approved',
  issued: 'Issued (live)',
  suspended: 'Suspended',
  expired: 'Expired',
  'handed-back': 'Handed back',
  cancelled: 'Cancelled',
  lapsed: 'Lapsed',
  withdrawn: 'Withdrawn',
  discarded: 'Discarded',
}

/** States after which nothing more happens to a permit. */
export const ENDED_PERMIT_STATES: readonly PermitState[] = [
  'refused',
  'cancelled',
  'lapsed',
  'withdrawn',
  'discarded',
]

/** States in which a permit claims its segments, its locks and its place in the calendar. */
export const CLAIMING_PERMIT_STATES: readonly PermitState[] = [
  'requested',
  'approved',
  'issued',
  'suspended',
  'expired',
  'handed-back',
]

/** What can be done to a permit. `expire` and `lapse` are the product's own, when a time has passed. */
export const PERMIT_ACTS = [
  'draft',
  'edit',
  'request',
  'return',
  'refuse',
  'approve',
  'change-terms',
  'withdraw',
  'discard',
  'lapse',
  'site-check',
  'accept',
  'hand-over',
  'revalidate',
  'extend',
  'suspend',
  'made-safe',
  'resume',
  'expire',
  'hand-back',
  'return-to-holder',
  'cancel',
] as const
export type PermitAct = (typeof PERMIT_ACTS)[number]

/** Why a point is isolated: so that the segment can be heated, or so that somebody can work on it or beside it. */
export const POINT_PURPOSES = ['to-heat', 'to-work'] as const
export type PointPurpose = (typeof POINT_PURPOSES)[number]

export const LOCK_REMOVALS = ['owner', 'owner-absent', 'transferred'] as const
export type LockRemoval = (typeof LOCK_REMOVALS)[number]

export const PERMIT_TEST_KINDS = [
  'oxygen',
  'flammable-gas',
  'zero-voltage',
  'earth-continuity',
  'insulation-resistance',
  'joint-resistance',
  'cut-out',
  'emergency-stop',
  'communications',
  'earth-fault-monitor',
  'surface-temperature',
] as const
export type PermitTestKind = (typeof PERMIT_TEST_KINDS)[number]

export const PERMIT_TEST_LABELS: Record<PermitTestKind, string> = {
  oxygen: 'Oxygen',
  'flammable-gas': 'Flammable gas',
  'zero-voltage': 'Absence of voltage',
  'earth-continuity': 'Earth continuity',
  'insulation-resistance': 'Insulation resistance',
  'joint-resistance': 'Resistance of bolted joints',
  'cut-out': 'Over-temperature cut-out',
  'emergency-stop': 'Emergency stop',
  communications: 'Radio and call points',
  'earth-fault-monitor': 'Earth-fault monitor',
  'surface-temperature': 'Surface temperature by contact probe',
}

/** The sections of a permit, in the order in which they are worked through. */
export const PERMIT_SECTIONS = [
  'identity',
  'place',
  'work',
  'people',
  'validity',
  'hazards',
  'isolation',
  'tests',
  'protection',
] as const
export type PermitSection = (typeof PERMIT_SECTIONS)[number]

export const PERMIT_SECTION_LABELS: Record<PermitSection, string> = {
  identity: 'Title and related papers',
  place: 'Place and plant',
  work: 'Work and limits',
  people: 'People',
  validity: 'Window and shifts',
  hazards: 'Hazards and precautions',
  isolation: 'Isolation points',
  tests: 'Tests before and during',
  protection: 'Protection, signs and rescue',
}

export const HAZARD_KEYS = [
  'hot-surface',
  'shock',
  'arc',
  'expansion',
  'stored-energy',
  'vent-pressure',
  'oxygen',
  'tube-entry',
  'fire',
  'elastomer',
  'insulation-dust',
  'gas-cylinders',
  'lifting',
  'lone-work',
  'magnetic-field',
  'radio-noise',
  'heat-stress',
  'x-ray',
] as const
export type HazardKey = (typeof HAZARD_KEYS)[number]

export const HAZARD_LABELS: Record<HazardKey, string> = {
  'hot-surface': 'Hot surfaces',
  shock: 'Electric shock',
  arc: 'Arc and hot joints',
  expansion: 'Thermal growth and bellows',
  'stored-energy': 'Stored energy of vacuum',
  'vent-pressure': 'Over-pressure on venting',
  oxygen: 'Oxygen deficiency',
  'tube-entry': 'Entry into the tube',
  fire: 'Fire',
  elastomer: 'Decomposing elastomer',
  'insulation-dust': 'Insulation fibre and dust',
  'gas-cylinders': 'Gas cylinders',
  lifting: 'Lifting',
  'lone-work': 'Working alone',
  'magnetic-field': 'Magnetic field',
  'radio-noise': 'Electrical noise',
  'heat-stress': 'Heat, noise and trips',
  'x-ray': 'X-ray',
}

export const PLANNED_WORK_KINDS = [
  'leak-check',
  'vent',
  'opening',
  'entry',
  'lifting',
  'bay-work',
  'visit',
  'power-maintenance',
  'fire-detection-off',
  'other',
] as const
export type PlannedWorkKind = (typeof PLANNED_WORK_KINDS)[number]

export const PLANNED_WORK_LABELS: Record<PlannedWorkKind, string> = {
  'leak-check': 'Leak check with spray',
  vent: 'Venting',
  opening: 'Opening a flange',
  entry: 'Entry into a tube or bay',
  lifting: 'Crane or lifting',
  'bay-work': 'Work in the bay',
  visit: 'Visit',
  'power-maintenance': 'Power maintenance',
  'fire-detection-off': 'Fire detection impaired',
  other: 'Other work',
}

/** Asked for; ruled by an officer where it lies near a heated segment; under way; over. */
export const PLANNED_WORK_STATES = [
  'planned',
  'limited',
  'refused',
  'started',
  'finished',
  'called-off',
] as const
export type PlannedWorkState = (typeof PLANNED_WORK_STATES)[number]

export const COMPETENCE_KINDS = [
  'permit-holder',
  'isolation',
  'electrician-licence',
  'oxygen-test',
  'attendant',
  'first-aid',
] as const
export type CompetenceKind = (typeof COMPETENCE_KINDS)[number]

export const COMPETENCE_LABELS: Record<CompetenceKind, string> = {
  'permit-holder': 'Permit holder',
  isolation: 'Isolating person',
  'electrician-licence': 'Electrician’s licence',
  'oxygen-test': 'Oxygen testing',
  attendant: 'Attendant and fire watch',
  'first-aid': 'First aid',
}

/** Events that have to reach people at once. Recorded and shown here; delivered with the alerts. */
export const SAFETY_EVENT_KINDS = [
  'heating-without-live-permit',
  'expired-while-heated',
  'suspended-while-heated',
  'permit-suspended',
  'low-oxygen',
  'high-oxygen',
  'test-overdue',
  'revalidation-missed',
] as const
export type SafetyEventKind = (typeof SAFETY_EVENT_KINDS)[number]
