/**
 * The fourteen states of a segment and the changes between them that make sense.
 *
 * A state is set by a person, with since-when and a reason; the product may suggest one but never sets one.
 * The transition table warns and asks for confirmation rather than forbids: what a person saw on site outranks a table.
 * The table itself is our judgement of the usual cycle of work (common practice, no source).
 */

export const SEGMENT_STATE_CODES = [
  'not-assembled',
  'vented',
  'roughing',
  'pumping',
  'isolated-test',
  'leak-hunt',
  'in-service',
  'bake-prep',
  'heating',
  'soak',
  'cooling',
  'post-bake-test',
  'maintenance',
  'unknown',
] as const

export type SegmentState = (typeof SEGMENT_STATE_CODES)[number]

interface SegmentStateFacts {
  label: string
  /** One sentence for the person who chooses it. */
  meaning: string
  /** Whether heat may be on the tube, so that cautions are shown. */
  hot: boolean
  /** Whether the tube is under high vacuum, so that ionisation gauges are expected to read. */
  highVacuum: boolean
  /** States that usually follow. Every state may also become maintenance or unknown. */
  next: readonly SegmentState[]
}

export const SEGMENT_STATES: Record<SegmentState, SegmentStateFacts> = {
  'not-assembled': {
    label: 'Not assembled',
    meaning: 'Open, with parts missing.',
    hot: false,
    highVacuum: false,
    next: ['vented'],
  },
  vented: {
    label: 'Vented',
    meaning: 'Closed or open at atmospheric pressure; say in the reason which gas is inside.',
    hot: false,
    highVacuum: false,
    next: ['roughing', 'not-assembled'],
  },
  roughing: {
    label: 'Roughing',
    meaning: 'A roughing set takes the gas out, down to the crossover.',
    hot: false,
    highVacuum: false,
    next: ['pumping', 'vented'],
  },
  pumping: {
    label: 'Pumping',
    meaning: 'High-vacuum pumps run and the pressure is on its way down.',
    hot: false,
    highVacuum: true,
    next: ['isolated-test', 'leak-hunt', 'bake-prep', 'in-service', 'vented'],
  },
  'isolated-test': {
    label: 'Isolated test',
    meaning: 'The pump port is shut and the rise of pressure is watched.',
    hot: false,
    highVacuum: true,
    next: ['pumping', 'leak-hunt', 'bake-prep', 'in-service'],
  },
  'leak-hunt': {
    label: 'Leak hunt',
    meaning: 'Joints are being tested one by one.',
    hot: false,
    highVacuum: true,
    next: ['pumping', 'isolated-test', 'in-service', 'vented'],
  },
  'in-service': {
    label: 'In service',
    meaning: 'On its own pumps and available for use.',
    hot: false,
    highVacuum: true,
    next: ['isolated-test', 'leak-hunt', 'bake-prep', 'vented'],
  },
  'bake-prep': {
    label: 'Bake prep',
    meaning: 'Being made ready for heating; no heat is on.',
    hot: false,
    highVacuum: true,
    next: ['heating', 'pumping', 'in-service', 'isolated-test'],
  },
  heating: {
    label: 'Heating',
    meaning: 'Heat is on and the temperature is going up.',
    hot: true,
    highVacuum: true,
    next: ['soak', 'cooling'],
  },
  soak: {
    label: 'Soak',
    meaning: 'Held at the bake temperature.',
    hot: true,
    highVacuum: true,
    next: ['cooling', 'heating'],
  },
  cooling: {
    label: 'Cooling',
    meaning: 'Heat is off; surfaces may still burn.',
    hot: true,
    highVacuum: true,
    next: ['post-bake-test', 'heating'],
  },
  'post-bake-test': {
    label: 'Post-bake test',
    meaning: 'Cold again, watched before it goes back into service.',
    hot: false,
    highVacuum: true,
    next: ['in-service', 'leak-hunt', 'bake-prep', 'isolated-test'],
  },
  maintenance: {
    label: 'Maintenance',
    meaning: 'Somebody works on it; its readings mean nothing for now.',
    hot: false,
    highVacuum: false,
    next: SEGMENT_STATE_CODES.filter((code) => code !== 'maintenance'),
  },
  unknown: {
    label: 'Unknown',
    meaning: 'Nobody can say what state it is in; go and look.',
    hot: false,
    highVacuum: false,
    next: SEGMENT_STATE_CODES.filter((code) => code !== 'unknown'),
  },
}

export function isSegmentState(text: string): text is SegmentState {
  return (SEGMENT_STATE_CODES as readonly string[]).includes(text)
}

/**
 * Whether a change from one state to another is part of the usual cycle. A hot segment may become maintenance or
 * unknown only after cooling has been recorded, because those two words hide the heat.
 */
export function isUsualChange(from: SegmentState, to: SegmentState): boolean {
  if (from === to) return false
  if ((to === 'maintenance' || to === 'unknown') && from !== to)
    return !SEGMENT_STATES[from].hot || to === 'unknown'
  return SEGMENT_STATES[from].next.includes(to)
}
