/** Ten thousand steps of people over permits, legal and illegal, the product beside a model written apart from it. */
import { isDeepStrictEqual } from 'node:util'
import { expect, test } from 'vitest'
import { dueAct, stateAsOf } from '#app/domain/permit-clock.ts'
import { missingParts } from '#app/domain/permit-completeness.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import type { ConflictFact, PermitActor, PermitFacts } from '#app/domain/permit-facts.ts'
import { ENDED_PERMIT_STATES } from '#app/domain/permit-words.ts'
import { type PermitStep, permitStep, productStep } from '#app/domain/permits.ts'
import { fullContent } from '#tests/support/permit-content.ts'
import {
  PermitModel,
  type Person,
  type Said,
  type Surroundings,
  type Terms,
} from '#tests/support/permit-model.ts'
import {
  chooseAct,
  choosePerson,
  chooseSaid,
  chooseTerms,
  freshSurroundings,
  oneOf,
  type Random,
  randomFrom,
  type WalkAct,
} from '#tests/support/permit-walk.ts'

const ZERO = Date.parse('2026-10-20T00:00:00.000Z')
const PLANNER = 4
const PEOPLE: readonly Person[] = [
  { id: 1, drafts: true, officerSince: null },
  { id: 2, drafts: true, officerSince: null },
  { id: 3, drafts: true, officerSince: null },
  { id: PLANNER, drafts: true, officerSince: -500 },
  { id: 5, drafts: false, officerSince: -500 },
  { id: 6, drafts: false, officerSince: -500 },
  { id: 7, drafts: false, officerSince: null },
  // Confirmed while the walk goes on: not an officer for a day.
  { id: 8, drafts: false, officerSince: 30 },
]

const at = (hour: number) => new Date(ZERO + Math.round(hour * 3600) * 1000)

function actorOf({ id, drafts, officerSince }: Person): PermitActor {
  return {
    personId: id,
    mayDraft: drafts,
    mayApprove: officerSince !== null,
    approvingSince: officerSince === null ? null : at(officerSince),
  }
}

const OXYGEN = { kind: 'oxygen', place: 'bay', low: 19.5, high: 23.5, unit: '%', everyHours: 12 } as const
const CUT_OUT = { kind: 'cut-out', place: 'set', low: null, high: null, unit: '', everyHours: null } as const

function contentOf(terms: Terms): PermitContent {
  const base = fullContent()
  const once = base.tests.filter(({ kind }) => kind !== 'oxygen' && kind !== 'cut-out')
  return fullContent({
    title: terms.whole ? 'A bake' : '',
    holderId: terms.holder,
    deputyIds: terms.deputies,
    from: at(terms.from).toISOString(),
    to: at(terms.to).toISOString(),
    unattended: terms.annex,
    nightCover: terms.annex ? 'pair' : '',
    annex: terms.annex ? { alarms: 'A', onCallMinutes: 30, shutOff: 'S' } : base.annex,
    tests: [OXYGEN, CUT_OUT, ...once],
  })
}

interface Stored {
  permit: PermitFacts['permit']
  acts: PermitFacts['acts'][number][]
}

function stored(author: number, terms: Terms, now: Date): Stored {
  const content = contentOf(terms)
  return {
    permit: {
      number: 'HSP-2026-001',
      state: 'draft',
      revision: 1,
      version: 1,
      approvedVersion: null,
      createdBy: author,
      requestedBy: null,
      approvedBy: null,
      holderId: null,
      windowFrom: at(terms.from),
      windowTo: at(terms.to),
      currentUntil: null,
      extensions: 0,
      extendedHours: 0,
      content,
      approvedContent: null,
    },
    acts: [{ act: 'draft', toState: 'draft', personId: author, at: now, detail: null }],
  }
}

const CONFLICT = { key: 'K', text: 'Something.', wayOut: 'Rule.', place: null } as const

function conflictsOf({ blocked, ruling }: Surroundings): ConflictFact[] {
  const conflicts: ConflictFact[] = []
  if (blocked) conflicts.push({ ...CONFLICT, rule: 'K1', effect: 'block', ruling: null })
  if (ruling !== 'none needed') {
    const given = {
      allowed: ruling !== 'denied',
      stale: ruling === 'outdated',
      text: '',
      by: 'Ione',
      at: at(0),
    }
    conflicts.push({ ...CONFLICT, rule: 'K3', effect: 'ruling', ruling: ruling === 'open' ? null : given })
  }
  return conflicts
}

function factsOf(
  { permit, acts }: Stored,
  around: Surroundings,
  now: number,
  content = permit.content,
): PermitFacts {
  const test = (
    kind: 'oxygen' | 'cut-out',
    place: string,
    taken: Surroundings['oxygen'],
    every: number | null,
  ) => {
    const due = taken !== null && every !== null && now >= taken.at + every
    const state = taken === null ? 'missing' : !taken.good ? 'failed' : due ? 'overdue' : 'good'
    return {
      kind,
      place,
      state,
      takenAt: taken === null ? null : at(taken.at),
      nextDueAt: null,
      text: '',
    } as const
  }
  const always = content.tests
    .filter(({ kind }) => kind !== 'oxygen' && kind !== 'cut-out')
    .map(
      ({ kind, place }) =>
        ({ kind, place, state: 'good', takenAt: at(-1), nextDueAt: null, text: '' }) as const,
    )
  return {
    permit: { ...permit, content },
    acts,
    plannerIds: [PLANNER],
    missing: missingParts(content, []),
    unprepared: [],
    unadopted: around.thresholdsSet ? [] : [{ hazard: 'fire', threshold: 'x', text: 'A value.' }],
    conflicts: conflictsOf(around),
    points: around.points.map(({ lock, by, verifiedBy }, i) => ({
      tag: `IP-${i + 1}`,
      lockNumber: lock,
      appliedBy: by,
      verifiedBy,
      holds: lock !== null && verifiedBy !== null,
      removed: false,
    })),
    locksOut: around.points.flatMap(({ lock }) => lock ?? []),
    tests: [test('oxygen', 'bay', around.oxygen, 12), test('cut-out', 'set', around.cutOut, null), ...always],
    heating: { on: around.heating, knownAt: null, since: null, basis: 'person', text: '' },
    policy: { extensionAllowed: around.mayExtend, keepDays: 365 },
  }
}

function detailOf(act: WalkAct, said: Said, now: number): object {
  switch (act) {
    case 'site-check':
      return { barriersPlaced: said.barriers, signsPosted: said.signs, text: 'as seen' }
    case 'accept':
    case 'revalidate':
      return { onSite: said.onSite }
    case 'hand-over':
      return { outgoingId: said.outgoing, how: 'at-site' }
    case 'extend':
      return { hours: said.hours, recheck: 'all of it' }
    case 'made-safe':
      return { who: 'Somebody', at: at(now).toISOString(), how: 'set off' }
    case 'hand-back':
      return {
        outcome: 'stopped',
        plantState: 'cold',
        peopleClear: true,
        toolsOut: true,
        hottestC: 30,
        locks: said.locksOff ? 'removed' : 'left',
        locksText: 'next permit',
      }
    case 'cancel':
      return { inspection: 'looked at' }
    default:
      return {}
  }
}

/** Carries out what a step says, as somebody would who knows nothing of the rules. */
function carryOut(old: Stored, step: PermitStep, personId: number | null, content: PermitContent): Stored {
  const permit = { ...old.permit, state: step.to, revision: old.permit.revision + 1 }
  if (content !== permit.content) {
    permit.content = content
    permit.version += 1
  }
  for (const effect of step.effects) {
    if (effect.kind === 'set-requester') permit.requestedBy = effect.personId
    if (effect.kind === 'approve') {
      permit.approvedBy = effect.personId
      permit.approvedVersion = permit.version
      permit.approvedContent = permit.content
    }
    if (effect.kind === 'void-approval') permit.approvedBy = null
    if (effect.kind === 'set-window') {
      permit.windowFrom = effect.from
      permit.windowTo = effect.to
    }
    if (effect.kind === 'set-current-until') permit.currentUntil = effect.at
    if (effect.kind === 'set-holder') permit.holderId = effect.personId
    if (effect.kind === 'count-extension') {
      permit.extensions += 1
      permit.extendedHours += effect.hours
    }
  }
  const { act, to, at: when, detail } = step
  return { permit, acts: [...old.acts, { act, toState: to, personId, at: when, detail }] }
}

/** What people do around a permit; mostly what is needed next, now and then what spoils it. */
function change(random: Random, around: Surroundings, now: number): void {
  const point = oneOf(random, around.points)
  const somebody = () => oneOf(random, PEOPLE).id
  const what = random()
  if (what < 0.4) {
    for (const each of around.points) {
      if (each.lock === null)
        Object.assign(each, { lock: `L-${Math.floor(random() * 1e6)}`, by: oneOf(random, [2, 3]) })
      else if (each.verifiedBy === null) each.verifiedBy = random() < 0.8 ? oneOf(random, [1, 7]) : somebody()
    }
  } else if (what < 0.52) Object.assign(point, { lock: null, by: null, verifiedBy: null })
  else if (what < 0.75) around.oxygen = { at: now, good: random() < 0.9 }
  else if (what < 0.85) around.cutOut = { at: now, good: random() < 0.9 }
  else if (what < 0.91) around.heating = oneOf(random, [true, false, false, null])
  else if (what < 0.94) around.blocked = random() < 0.25
  else if (what < 0.97)
    around.ruling = oneOf(random, ['none needed', 'none needed', 'open', 'allowed', 'denied', 'outdated'])
  else if (what < 0.985) around.thresholdsSet = random() < 0.8
  else around.mayExtend = random() < 0.85
}

/** A careful crew gets everything ready, so that walks reach live work often. */
function prepare(random: Random, around: Surroundings, now: number, over: boolean): void {
  if (over) {
    for (const point of around.points) Object.assign(point, { lock: null, by: null, verifiedBy: null })
    around.heating = false
    return
  }
  around.points.forEach((point, i) => {
    point.lock ??= `L-${i}`
    Object.assign(point, { by: 3, verifiedBy: random() < 0.9 ? 7 : oneOf(random, [5, 6]) })
  })
  // What was tested before is not always tested anew.
  if (around.oxygen?.good !== true || random() < 0.5) around.oxygen = { at: now, good: true }
  around.cutOut = { at: now, good: true }
}

/** Situations that last for days. */
const LONG = ['issued', 'suspended', 'expired', 'handed-back']
const LIVE = ['issued']

function keepsPromises(
  before: Stored,
  { permit, acts }: Stored,
  around: Surroundings,
  now: number,
): string[] {
  const broken: string[] = []
  const promise = (holds: boolean, words: string) => {
    if (!holds) broken.push(words)
  }
  const became = LIVE.includes(permit.state) && !LIVE.includes(before.permit.state)
  if (LIVE.includes(permit.state)) {
    const writers = acts.filter(({ act }) => ['draft', 'edit', 'request', 'change-terms'].includes(act))
    const approver = permit.approvedBy
    promise(approver !== null && permit.approvedVersion === permit.version, 'live as approved')
    promise(
      !writers.some(({ personId }) => personId === approver) && approver !== PLANNER,
      'approved by another',
    )
    promise(permit.holderId !== approver, 'not held by who approved')
    promise(!acts.some(({ toState }) => toState === 'expired'), 'never live again once expired')
    promise(
      permit.windowTo !== null && permit.currentUntil !== null && permit.currentUntil <= permit.windowTo,
      'inside its window',
    )
  }
  if (became) {
    promise(
      around.points.every(
        ({ lock, by, verifiedBy }) =>
          lock !== null && verifiedBy !== null && verifiedBy !== by && verifiedBy !== permit.approvedBy,
      ),
      'isolated and verified',
    )
    promise(
      around.oxygen?.good === true && now < around.oxygen.at + 12 && around.cutOut?.good === true,
      'tested',
    )
  }
  const hanging = around.points.some(({ lock }) => lock !== null)
  promise(
    !(
      ['cancelled', 'withdrawn', 'refused'].includes(permit.state) &&
      permit.state !== before.permit.state &&
      hanging
    ),
    'no lock left behind',
  )
  promise(permit.extendedHours <= 72 && permit.extensions <= 2, 'extended within bounds')
  return broken
}

// Words about a step are made up only where it went wrong: there are tens of thousands of comparisons.
function agree(actual: unknown, expected: unknown, words: () => string): void {
  if (!isDeepStrictEqual(actual, expected)) expect(actual, words()).toEqual(expected)
}

test('10 000 steps by anybody: the product does what the model does, and keeps its promises', () => {
  const random = randomFrom(20261109)
  const done = new Map<string, number>()
  const refused = new Map<string, number>()
  const note = (map: Map<string, number>, key: string) => map.set(key, (map.get(key) ?? 0) + 1)
  let steps = 0
  let now = 0
  let walks = 0
  while (steps < 10_000) {
    walks += 1
    const terms = chooseTerms(random, now, PEOPLE)
    const author = oneOf(random, [1, 2, 3, PLANNER])
    const around = freshSurroundings()
    const model = new PermitModel(author, terms, PLANNER, around)
    let product = stored(author, terms, at(now))
    const started = now
    for (let left = 60; left > 0 && steps < 10_000; left -= 1) {
      // Quarters of hours, which add up exactly.
      now += oneOf(random, LONG.includes(model.situation) ? [0, 0.25, 0.5, 1, 1, 4] : [0, 0, 0.25, 0.25, 0.5])
      if (random() < 0.5) prepare(random, around, now, model.situation === 'handed-back' || random() < 0.1)
      else if (model.situation === 'approved' && random() < 0.6) prepare(random, around, now, false)
      else if (oneOf(random, [true, false])) change(random, around, now)
      const trail = () =>
        `walk ${walks} from ${started} at ${now}: ${product.acts.map(({ act }) => act).join(' ')}`

      // Sometimes the product notes what time has done at once, sometimes only when somebody comes by.
      model.becomes(now)
      const due = dueAct(product.permit, at(now))
      const other = due?.act === 'expire' ? 'lapse' : 'expire'
      agree(productStep(factsOf(product, around, now), other, at(now)).kind, 'refused', trail)
      if (due !== null && random() < 0.5) {
        const step = productStep(factsOf(product, around, now), due.act, at(now))
        if (step.kind === 'refused') throw new Error(`${due.act} is due and refused, ${trail()}`)
        agree(step.at <= at(now), true, trail)
        product = carryOut(product, step, null, product.permit.content)
        note(done, due.act)
      }

      const act = chooseAct(random, model.situation)
      const named = [model.terms.holder, ...model.terms.deputies]
      const who = choosePerson(random, act, PEOPLE, named)
      const said = chooseSaid(random, now, PEOPLE, model.holder)
      const editing = act === 'edit' || act === 'change-terms'
      const content = editing ? contentOf(said.terms) : product.permit.content
      const input = { reason: said.reason ? 'for a walk' : '', detail: detailOf(act, said, now) }
      const outcome = permitStep(factsOf(product, around, now, content), actorOf(who), act, input, at(now))
      const allowed = model.attempt(act, who, now, said)
      const told = outcome.kind === 'refused' ? outcome.reasons.map(({ text }) => text).join(' | ') : ''
      agree(outcome.kind === 'step', allowed, () => `${act} by ${who.id} ${told} ${trail()}`)
      note(allowed ? done : refused, act)
      steps += 1
      if (outcome.kind === 'step') {
        const late = dueAct(product.permit, at(now))
        if (late !== null) {
          const step = productStep(factsOf(product, around, now), late.act, at(now))
          if (step.kind === 'refused') throw new Error(`${late.act} is due and refused, ${trail()}`)
          product = carryOut(product, step, null, product.permit.content)
          note(done, late.act)
        }
        const before = product
        agree(outcome.from, before.permit.state, trail)
        product = carryOut(product, outcome, who.id, content)
        agree(keepsPromises(before, product, around, now), [], trail)
      }

      // Returned to its holder with no time left, it is suspended for no time at all.
      model.becomes(now)
      const { permit } = product
      const seen = stateAsOf(permit, at(now)).state
      const lapsedAfterWork = permit.state === 'approved' && seen === 'lapsed' && model.begun !== null
      agree(lapsedAfterWork ? 'expired' : seen, model.situation, trail)
      agree(permit.holderId, model.holder, trail)
      agree(permit.windowTo, at(model.windowTo), trail)
      if (model.situation === 'issued') agree(permit.currentUntil, at(model.validUntil as number), trail)
      if (ENDED_PERMIT_STATES.includes(permit.state)) left = Math.min(left, 2)
    }
    now += 1
  }
  // A walk that never gets anywhere would prove nothing.
  const acts = [
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
  ]
  const rare = acts.filter((act) => (done.get(act) ?? 0) < 10)
  expect(rare, JSON.stringify([...done])).toEqual([])
  expect(acts.filter((act) => act !== 'expire' && act !== 'lapse' && (refused.get(act) ?? 0) < 20)).toEqual(
    [],
  )
})
