/** The demo's permits, played through the product's own rules: every step of every history has to be one they allow. */
import { describe, expect, it } from 'vitest'
import { missingParts } from '#app/domain/permit-completeness.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import type { PermitActor, PermitFacts, PointFact, TestFact } from '#app/domain/permit-facts.ts'
import { HAZARD_KEYS, type PermitState } from '#app/domain/permit-words.ts'
import { type PermitStep, permitStep, productStep } from '#app/domain/permits.ts'
import { at } from '#seeds/demo-time.ts'
import { nameOf, PERSON_ID } from '#seeds/people.ts'
import { eventRows } from '#seeds/permits/events.ts'
import { permitTables } from '#seeds/permits/permits.ts'
import { PERMITS } from '#seeds/scenario/permits.ts'

const NOW = at('2026-11-09 08:00')
const PLANNER = PERSON_ID.bram
const tables = permitTables(0, ({ segments, work }) =>
  work.startsWith('Bake') ? { id: segments.length, version: 1 } : null,
)

const rowOf = (number: string) => {
  const found = tables.permits.find((one) => one.number === number)
  if (found === undefined) throw new Error(`no ${number}`)
  return found
}
const actsOf = (permitId: number) => tables.acts.filter((one) => one.permitId === permitId)
const locksOf = (permitId: number) => tables.locks.points.filter((one) => one.permitId === permitId)

/** Locks as they were at an instant. */
function pointsAt(permitId: number, when: Date): PointFact[] {
  return locksOf(permitId)
    .filter(({ appliedAt }) => appliedAt <= when)
    .map((one) => {
      const removed = one.removedAt != null && one.removedAt <= when
      const verified = one.verifiedAt != null && one.verifiedAt <= when
      return {
        tag: one.tag,
        lockNumber: one.lockNumber,
        appliedBy: one.appliedBy,
        verifiedBy: verified ? (one.verifiedBy ?? null) : null,
        holds: verified && !removed,
        removed,
      }
    })
}

function testsAt(permitId: number, content: PermitContent, when: Date): TestFact[] {
  return content.tests.map(({ kind, place, low, high }) => {
    const last = tables.tests
      .filter((one) => one.permitId === permitId && one.kind === kind && one.place === place)
      .filter(({ recordedAt }) => recordedAt <= when)
      .at(-1)
    const shared = {
      kind,
      place,
      text: '',
      takenAt: last?.takenAt ?? null,
      nextDueAt: last?.nextDueAt ?? null,
    }
    if (last === undefined) return { ...shared, state: 'missing' as const }
    const value = last.value ?? null
    const within = value === null || ((low === null || value >= low) && (high === null || value <= high))
    if (!last.passed || !within) return { ...shared, state: 'failed' as const }
    const overdue = last.nextDueAt != null && last.nextDueAt <= when
    return { ...shared, state: overdue ? ('overdue' as const) : ('good' as const) }
  })
}

function actorOf(personId: number): PermitActor {
  const officer = personId === PERSON_ID.ione || personId === PERSON_ID.rafe
  return {
    personId,
    mayDraft: !officer,
    mayApprove: officer,
    approvingSince: officer
      ? at(personId === PERSON_ID.ione ? '2025-09-01 08:00' : '2026-01-01 00:00')
      : null,
  }
}

interface Played {
  state: PermitState
  windowFrom: Date | null
  windowTo: Date | null
  currentUntil: Date | null
  holderId: number | null
  requestedBy: number | null
  approvedBy: number | null
  extensions: number
  extendedHours: number
}

function follow(played: Played, { to, effects }: PermitStep): void {
  played.state = to
  for (const effect of effects) {
    if (effect.kind === 'set-window') {
      played.windowFrom = effect.from
      played.windowTo = effect.to
    } else if (effect.kind === 'set-current-until') played.currentUntil = effect.at
    else if (effect.kind === 'set-holder') played.holderId = effect.personId
    else if (effect.kind === 'set-requester') played.requestedBy = effect.personId
    else if (effect.kind === 'approve') played.approvedBy = effect.personId
    else if (effect.kind === 'count-extension') {
      played.extensions += 1
      played.extendedHours += effect.hours
    }
  }
}

/** Plays a permit's acts one by one. @returns what became of it, and everything the rules had against a step */
function play(permitId: number): { played: Played; against: string[] } {
  const acts = actsOf(permitId)
  const versions = tables.versions.filter((one) => one.permitId === permitId)
  const number = tables.permits[permitId - 1]?.number ?? ''
  const createdBy = acts[0]?.personId ?? 0
  const against: string[] = []
  const played: Played = {
    state: 'draft',
    windowFrom: null,
    windowTo: null,
    currentUntil: null,
    holderId: null,
    requestedBy: null,
    approvedBy: null,
    extensions: 0,
    extendedHours: 0,
  }
  for (const [index, act] of acts.entries()) {
    const content = versions.find(({ version }) => version === act.version)?.content as PermitContent
    const when = act.at
    const facts: PermitFacts = {
      permit: {
        number,
        revision: index,
        version: act.version,
        approvedVersion: played.approvedBy === null ? null : act.version,
        createdBy,
        content,
        approvedContent: played.approvedBy === null ? null : content,
        ...played,
      },
      acts: acts.slice(0, index).map((one) => ({
        act: one.act,
        toState: one.toState,
        personId: one.personId ?? null,
        at: one.at,
        detail: one.detail,
      })),
      plannerIds: [PLANNER],
      missing: missingParts(content, HAZARD_KEYS),
      unadopted: [],
      unprepared: [],
      conflicts: [],
      points: pointsAt(permitId, when),
      locksOut: pointsAt(permitId, when).flatMap(({ removed, lockNumber }) =>
        removed || lockNumber === null ? [] : [lockNumber],
      ),
      tests: testsAt(permitId, content, when),
      heating: { on: false, knownAt: when, since: null, basis: 'person', text: '' },
      policy: { extensionAllowed: true, keepDays: 1826 },
    }
    const step =
      act.act === 'expire' || act.act === 'lapse'
        ? productStep(facts, act.act, when)
        : permitStep(
            facts,
            actorOf(act.personId ?? 0),
            act.act,
            { reason: act.reason ?? '', detail: act.detail },
            when,
          )
    if (step.kind === 'refused') {
      against.push(
        `${number} ${act.act} at ${when.toISOString()}: ${step.reasons.map(({ text }) => text).join(' ')}`,
      )
      played.state = act.toState
      continue
    }
    if (step.from !== act.fromState || step.to !== act.toState || step.at.getTime() !== when.getTime()) {
      against.push(
        `${number} ${act.act}: ${step.from} to ${step.to}, written as ${act.fromState} to ${act.toState}`,
      )
    }
    follow(played, step)
  }
  return { played, against }
}

describe('histories of the demo’s permits', () => {
  it('take no step that the rules refuse', () => {
    const against = PERMITS.flatMap((_, index) => play(index + 1).against)
    expect(against).toEqual([])
  })

  it('end where the tables say: state, window, validity, people', () => {
    for (const [index, row] of tables.permits.entries()) {
      const { played } = play(index + 1)
      const { state, windowFrom, windowTo, currentUntil, holderId, requestedBy, approvedBy, extensions } = row
      expect(
        {
          state,
          windowFrom,
          windowTo,
          currentUntil,
          holderId,
          requestedBy,
          approvedBy,
          extensions,
          extendedHours: row.extendedHours,
        },
        row.number,
      ).toEqual(played)
    }
  })

  it('stand as the scenario has them on the morning', () => {
    expect(tables.permits).toHaveLength(41)
    expect(tables.permits.map(({ state }) => state)).toEqual(PERMITS.map(({ state }) => state))
    const suspended = new Set(
      tables.acts.filter(({ act }) => act === 'suspend').map(({ permitId }) => permitId),
    )
    expect(suspended.size).toBe(4)
    expect(tables.acts.filter(({ act }) => act === 'suspend')).toHaveLength(4)
    expect(tables.acts.filter(({ act }) => act === 'expire')).toHaveLength(1)
    expect(
      eventRows()
        .map(({ kind }) => kind)
        .sort(),
    ).toEqual([
      'expired-while-heated',
      'permit-suspended',
      'permit-suspended',
      'permit-suspended',
      'permit-suspended',
    ])
    const live = rowOf('HSP-2026-031')
    expect(live.holderId).toBe(PERSON_ID.pim)
    expect(live.currentUntil).toEqual(at('2026-11-09 18:00'))
    expect(live.windowTo).toEqual(at('2026-11-13 18:00'))
    const cooling = rowOf('HSP-2026-030')
    expect([cooling.windowTo, cooling.extensions, cooling.extendedHours]).toEqual([
      at('2026-11-10 18:00'),
      1,
      12,
    ])
    expect(cooling.currentUntil).toEqual(at('2026-11-09 18:00'))
  })

  it('leave six locks at each of the two live permits and none elsewhere', () => {
    const hanging = (number: string) =>
      tables.locks.inUse
        .filter(({ permitId }) => permitId === rowOf(number).id)
        .map(({ lockNumber }) => lockNumber)
        .sort()
    expect(hanging('HSP-2026-031')).toEqual(['L-114', 'L-115', 'L-116', 'L-117', 'L-118', 'L-119'])
    expect(hanging('HSP-2026-030')).toEqual(['L-104', 'L-105', 'L-106', 'L-107', 'L-108', 'L-109'])
    expect(tables.locks.inUse).toHaveLength(12)
    const output = tables.locks.points.find(
      ({ lockNumber, removedAt }) => lockNumber === 'L-109' && removedAt == null,
    )
    expect(output?.isolates).toBe('Output of HX-2')
  })

  it('hang no lock in two places at once, and have each verified by somebody else than who hung or approved', () => {
    const { points } = tables.locks
    for (const one of points) {
      const permit = tables.permits[one.permitId - 1]
      expect([one.appliedBy, one.appliedWitness, permit?.approvedBy], one.lockNumber).not.toContain(
        one.verifiedBy,
      )
      expect((one.verifiedAt as Date) > one.appliedAt, one.lockNumber).toBe(true)
      const elsewhere = points.filter(
        (other) =>
          other.id !== one.id &&
          other.lockNumber === one.lockNumber &&
          other.appliedAt < (one.removedAt ?? NOW) &&
          one.appliedAt < (other.removedAt ?? NOW),
      )
      expect(elsewhere, `${permit?.number} ${one.lockNumber}`).toEqual([])
      // Who has no sign-in is always entered by somebody who has.
      expect(one.appliedWitness != null, one.lockNumber).toBe(one.appliedBy === PERSON_ID.wendel)
    }
  })

  it('are written in order, nothing of it after the demo’s morning', () => {
    for (const { id, number } of tables.permits) {
      const times = actsOf(id as number).map(({ at: when }) => when.getTime())
      expect(times, number).toEqual([...times].sort((a, b) => a - b))
      expect(Math.max(...times), number).toBeLessThan(NOW.getTime())
    }
    const begun = tables.permits.map(({ createdAt }) => createdAt.getTime())
    expect(begun).toEqual([...begun].sort((a, b) => a - b))
    const codes = tables.permits.map(({ shortCode }) => shortCode)
    expect(new Set(codes).size).toBe(41)
    for (const code of codes) expect(code).toMatch(/^[BCDFGHJKMPQRTVWXY346789]{6}$/)
  })

  it('lack nothing where they were asked for, and much in the draft', () => {
    for (const { permitId, content, version } of tables.versions) {
      const number = tables.permits[permitId - 1]?.number
      const missing = missingParts(content, HAZARD_KEYS).map(({ text }) => text)
      if (number === 'HSP-2026-033') expect(missing.length).toBeGreaterThan(15)
      else expect(missing, `${number} version ${version}`).toEqual([])
    }
  })

  it('name people of the demo only, the electrician never as signer', () => {
    const signers = new Set(tables.signatures.map(({ personId }) => nameOf(personId)))
    expect(signers.has('Wendel Quarrie')).toBe(false)
    const ids = tables.signatures.map(({ id }) => id)
    expect(new Set(ids).size).toBe(ids.length)
  })
})
