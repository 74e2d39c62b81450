/** Random walks of people over permits: who tries what, and what they say. Repeatable by seed. */
import type { Person, Said, Situation, Surroundings, Terms } from './permit-model.ts'

export type Random = () => number

/** A small generator (mulberry32) that gives the same walk for the same seed. */
export function randomFrom(seed: number): Random {
  let state = seed >>> 0
  return () => {
    state = (state + 0x6d2b79f5) >>> 0
    let mixed = Math.imul(state ^ (state >>> 15), state | 1)
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61)
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 4_294_967_296
  }
}

export function oneOf<Value>(random: Random, values: readonly Value[]): Value {
  return values[Math.floor(random() * values.length)] as Value
}

function chance(random: Random, share: number): boolean {
  return random() < share
}

const ACTS = [
  'edit',
  'request',
  'return',
  'refuse',
  'approve',
  'change-terms',
  'withdraw',
  'discard',
  'site-check',
  'accept',
  'hand-over',
  'revalidate',
  'extend',
  'suspend',
  'made-safe',
  'resume',
  'hand-back',
  'return-to-holder',
  'cancel',
] as const
export type WalkAct = (typeof ACTS)[number]

/** What people would mostly try; named more than once where it should come more often. */
const LIKELY: Record<Situation, readonly WalkAct[]> = {
  draft: ['edit', 'request', 'request', 'request', 'request', 'request'],
  requested: [
    'approve',
    'approve',
    'approve',
    'approve',
    'approve',
    'approve',
    'return',
    'refuse',
    'hand-back',
  ],
  returned: ['edit', 'request', 'request', 'request'],
  approved: [
    'site-check',
    'site-check',
    'site-check',
    'accept',
    'accept',
    'accept',
    'accept',
    'change-terms',
    'withdraw',
  ],
  issued: ['revalidate', 'revalidate', 'extend', 'hand-over', 'suspend', 'hand-back', 'site-check'],
  suspended: [
    'site-check',
    'site-check',
    'resume',
    'resume',
    'change-terms',
    'made-safe',
    'hand-over',
    'hand-back',
  ],
  expired: ['hand-back', 'made-safe', 'resume', 'revalidate'],
  'handed-back': ['cancel', 'cancel', 'return-to-holder'],
  refused: [],
  cancelled: [],
  lapsed: [],
  withdrawn: [],
  discarded: [],
}

export function chooseAct(random: Random, situation: Situation): WalkAct {
  const likely = LIKELY[situation]
  return likely.length === 0 || chance(random, 0.2) ? oneOf(random, ACTS) : oneOf(random, likely)
}

/** Somebody at random, more often one of whom the act could be expected. */
export function choosePerson(
  random: Random,
  act: WalkAct,
  people: readonly Person[],
  named: readonly number[],
): Person {
  if (chance(random, 0.35)) return oneOf(random, people)
  const officers = people.filter(({ officerSince }) => officerSince !== null)
  if (['return', 'refuse', 'approve', 'extend', 'resume', 'return-to-holder', 'cancel'].includes(act)) {
    return oneOf(random, officers)
  }
  if (['accept', 'hand-over', 'revalidate', 'hand-back'].includes(act)) {
    const one = oneOf(random, named)
    return people.find(({ id }) => id === one) ?? oneOf(random, people)
  }
  return oneOf(
    random,
    people.filter(({ drafts }) => drafts),
  )
}

/** Terms around an hour, mostly in order. */
export function chooseTerms(random: Random, now: number, people: readonly Person[]): Terms {
  const from = now + oneOf(random, [-3, -1, 0, 0.5, 1, 1, 1, 1, 6])
  const length = oneOf(random, [-2, 1, 10, 30, 60, 120, 240, 240.5])
  const [holder, ...deputies] = shuffled(
    random,
    people.map(({ id }) => id),
  ).slice(0, 3)
  return {
    from,
    to: from + length,
    holder: holder as number,
    deputies: deputies.slice(0, oneOf(random, [1, 1, 2])),
    whole: chance(random, 0.93),
    annex: chance(random, 0.3),
  }
}

function shuffled<Value>(random: Random, values: readonly Value[]): Value[] {
  return values
    .map((value) => ({ value, key: random() }))
    .sort((a, b) => a.key - b.key)
    .map(({ value }) => value)
}

export function chooseSaid(
  random: Random,
  now: number,
  people: readonly Person[],
  holder: number | null,
): Said {
  return {
    reason: chance(random, 0.9),
    onSite: chance(random, 0.93),
    barriers: chance(random, 0.93),
    signs: chance(random, 0.93),
    outgoing: chance(random, 0.8) && holder !== null ? holder : oneOf(random, people).id,
    hours: oneOf(random, [0, 6, 12, 36, 72, 73]),
    locksOff: chance(random, 0.4),
    terms: chooseTerms(random, now, people),
  }
}

/** Surroundings in which work can begin: every point locked by one and verified by another, tests fresh and good. */
export function freshSurroundings(): Surroundings {
  return {
    points: [
      { lock: null, by: null, verifiedBy: null },
      { lock: null, by: null, verifiedBy: null },
    ],
    oxygen: null,
    cutOut: null,
    heating: false,
    blocked: false,
    ruling: 'none needed',
    thresholdsSet: true,
    mayExtend: true,
  }
}
