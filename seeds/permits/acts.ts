/** What was done to each permit of the demo, act by act. */

import { TZDate } from '@date-fns/tz'
import type { PermitAct, PermitState } from '../../app/domain/permit-words.ts'
import { at, DEMO_START, DEMO_ZONE } from '../demo-time.ts'
import { hoursAfter } from '../log/entry.ts'
import { nameOf, PERSON_ID, type PersonKey } from '../people.ts'
import { pick } from '../readings/noise.ts'
import type { DemoPermit, PermitPause } from '../scenario/permits.ts'
import { peopleOf } from './crews.ts'
import { jobOf } from './jobs.ts'

export interface DemoAct {
  act: PermitAct
  fromState: PermitState
  toState: PermitState
  revision: number
  version: number
  at: Date
  /** Null where the product itself acted. */
  by: PersonKey | null
  reason: string
  detail: unknown
}

export interface PermitHistory {
  acts: DemoAct[]
  acceptedAt: Date | null
  /** End of the current validity after the last act. */
  currentUntil: Date | null
  /** Each renewal with who signed it, for the tests and the round that went before. */
  renewals: { at: Date; by: PersonKey }[]
  /** When the holder said at last that it is over; null while it is live. */
  handedBackAt: Date | null
}

const minutesAfter = (when: Date, minutes: number) => hoursAfter(when, minutes / 60)

function dayAfter(when: Date, days: number, hour: number, minute: number): Date {
  const local = new TZDate(when.getTime(), DEMO_ZONE)
  return new Date(
    new TZDate(
      local.getFullYear(),
      local.getMonth(),
      local.getDate() + days,
      hour,
      minute,
      0,
      DEMO_ZONE,
    ).getTime(),
  )
}

/** The workday before, at a time of day. */
function workdayBefore(when: Date, days: number, hour: number, minute: number): Date {
  let found = dayAfter(when, -days, hour, minute)
  while ([0, 6].includes(new TZDate(found.getTime(), DEMO_ZONE).getDay())) {
    found = dayAfter(found, -1, hour, minute)
  }
  return found
}

/** When each permit was begun: some days before its window, and never after one of a higher number. */
export function begunAt(permits: readonly DemoPermit[]): Date[] {
  const found: Date[] = []
  let latest = at('2026-11-05 16:20')
  for (const permit of [...permits].reverse()) {
    const minute = pick([5, 12, 20, 35, 40, 50], permit.number)
    const own =
      permit.window === null
        ? latest
        : permit.number === 'HSP-2026-032'
          ? at('2026-10-27 16:20')
          : workdayBefore(permit.window.fromAt, 5, 10, minute)
    latest = own < latest ? own : minutesAfter(latest, -25)
    found.push(permit.window === null ? own : latest)
    latest = found.at(-1) as Date
  }
  return found.reverse()
}

class Story {
  readonly acts: DemoAct[] = []
  private state: PermitState = 'draft'
  version = 1

  add(
    act: PermitAct,
    toState: PermitState,
    when: Date,
    by: PersonKey | null,
    reason = '',
    detail: unknown = null,
  ) {
    this.acts.push({
      act,
      fromState: this.state,
      toState,
      revision: this.acts.length + 1,
      version: this.version,
      at: when,
      by,
      reason,
      detail,
    })
    this.state = toState
  }
}

/** An officer who is there at that hour: the deputy covers from 18:00. */
function officerAt(when: Date, usual: PersonKey): PersonKey {
  const hour = new TZDate(when.getTime(), DEMO_ZONE).getHours()
  return hour >= 18 && when >= at('2026-01-01 00:00') ? 'rafe' : usual
}

/** Everything done to a permit from its draft to its end, or to the demo's morning. */
export function historyOf(permit: DemoPermit, begun: Date): PermitHistory {
  const story = new Story()
  const nothing = { acts: story.acts, acceptedAt: null, currentUntil: null, renewals: [], handedBackAt: null }
  const { requestedBy, approvedBy, state, window } = permit
  story.add('draft', 'draft', begun, requestedBy)
  if (state === 'draft' || window === null) return nothing
  const asked = askedAt(permit, begun, window.fromAt)
  story.add('request', 'requested', asked, requestedBy)
  if (permit.number === 'HSP-2026-032') {
    askAgain(story)
    return nothing
  }
  if (state === 'withdrawn') {
    story.add(
      'withdraw',
      'withdrawn',
      workdayBefore(window.fromAt, 1, 9, 25),
      requestedBy,
      'The box can wait for the next bake of SG-16',
    )
    return nothing
  }
  const decided = workdayBefore(
    window.fromAt,
    1,
    approvedBy === 'rafe' ? 18 : 16,
    pick([10, 25, 40], permit.number),
  )
  if (state === 'refused') {
    story.add('refuse', 'refused', decided, 'ione', permit.refusal)
    return nothing
  }
  if (approvedBy === null) throw new Error(`${permit.number} has no approver in the scenario`)
  story.add('approve', 'approved', decided, approvedBy, '', { terms: '' })
  if (state === 'lapsed') {
    story.add('lapse', 'lapsed', hoursAfter(window.fromAt, 2), null)
    return nothing
  }
  return worked(story, permit, window, approvedBy)
}

/** When it was asked for: two workdays before its window, or as the scenario of the pair has it. */
function askedAt({ number }: DemoPermit, begun: Date, windowFrom: Date): Date {
  if (number === 'HSP-2026-032') return at('2026-10-28 09:40')
  const wanted = workdayBefore(windowFrom, 3, 14, pick([5, 20, 35, 50], number))
  return wanted > begun ? wanted : minutesAfter(begun, 40)
}

/** Sent back because the officer wanted to know more, and asked for anew. */
function askAgain(story: Story): void {
  story.add(
    'return',
    'returned',
    at('2026-11-06 09:30'),
    'ione',
    'Say where the pair is earthed, how long the soak of a segment is that has never been baked, and link the plan.',
  )
  story.version = 2
  story.add(
    'edit',
    'returned',
    at('2026-11-06 15:40'),
    'bram',
    'Earthing point settled, a day more of soak, plan linked',
  )
  story.add('request', 'requested', at('2026-11-06 16:05'), 'bram')
}

function worked(
  story: Story,
  permit: DemoPermit,
  window: { fromAt: Date; untilAt: Date },
  approvedBy: PersonKey,
): PermitHistory {
  const { holder, deputy, mate } = peopleOf(permit)
  const windowHours = (window.untilAt.getTime() - window.fromAt.getTime()) / 3_600_000
  const validHours = windowHours > 12 ? 24 : 12
  let end = permit.extendedFrom ?? window.untilAt
  const cap = (when: Date) => (when < end ? when : end)
  // Windows begin at six or at seven and eight; crews come at a quarter to seven.
  const accepted = minutesAfter(window.fromAt, windowHours > 100 ? 108 : 45)
  story.add('site-check', 'approved', minutesAfter(accepted, -8), holder, '', SITE_CHECK)
  story.add('accept', 'issued', accepted, holder, '', { onSite: true })
  let until = cap(hoursAfter(accepted, validHours))
  const renewals: PermitHistory['renewals'] = []
  const over = overAt(permit, window)
  const extended = extensionOf(permit)
  const renew = (when: Date) => {
    const by = pick([holder, holder, deputy], `${permit.number}/${when.toISOString()}`)
    const signer = when.getTime() === LAST_RENEWAL.getTime() ? holder : by
    story.add('revalidate', 'issued', when, signer, '', { onSite: true })
    renewals.push({ at: when, by: signer })
    until = cap(hoursAfter(when, validHours))
  }
  const steps = [
    ...evenings(permit, accepted, over ?? DEMO_START).map((when) => ({ when, does: () => renew(when) })),
    ...permit.suspensions.map((pause) => ({
      when: pause.fromAt,
      does: () => stop(story, permit, pause, mate),
    })),
    ...(extended === null
      ? []
      : [
          {
            when: extended.when,
            does: () => {
              end = window.untilAt
              const hours = (end.getTime() - (permit.extendedFrom as Date).getTime()) / 3_600_000
              story.add('extend', 'issued', extended.when, 'ione', extended.reason, {
                hours,
                recheck: 'Locks, barriers and tests looked at again; all as before',
              })
            },
          },
        ]),
    ...(permit.points === undefined
      ? []
      : [{ when: LOCKS_MOVED.from, does: () => moveLocks(story, permit, approvedBy) }]),
  ].sort((a, b) => a.when.getTime() - b.when.getTime())
  for (const [index, step] of steps.entries()) {
    step.does()
    const next = steps[index + 1]?.when ?? over ?? DEMO_START
    bridge(permit, () => until, next, renew)
  }
  if (steps.length === 0) bridge(permit, () => until, over ?? DEMO_START, renew)
  if (permit.expiredLiveAt !== undefined) story.add('expire', 'expired', permit.expiredLiveAt, null)
  const handedBackAt = over === null ? null : handBack(story, permit, over, approvedBy)
  return { acts: story.acts, acceptedAt: accepted, currentUntil: until, renewals, handedBackAt }
}

const SITE_CHECK = { barriersPlaced: true, signsPosted: true, text: 'Doors and lamps at both barriers tried' }

/** The last renewal of both live permits: it carries to the evening of the demo's day. */
const LAST_RENEWAL = at('2026-11-08 18:00')

/**
 * A renewal every evening, each a few minutes earlier than the day before, so that none comes later than a day after
 * the last. None while the work was stopped.
 */
function evenings(permit: DemoPermit, accepted: Date, over: Date): Date[] {
  const found: Date[] = []
  for (let day = 0; ; day += 1) {
    const evening = dayAfter(accepted, day, 18, 0)
    if (evening >= over) break
    found.push(evening)
  }
  const working = found
    .map((evening, index) => minutesAfter(evening, 2 * (found.length - 1 - index)))
    .filter((evening) => !permit.suspensions.some((one) => one.fromAt <= evening && evening < one.untilAt))
  return [...working, ...beforeStops(permit, [accepted, ...working])]
}

/** Where a stop outlasted the validity of the evening before, somebody had renewed it in the hours before the stop. */
function beforeStops({ suspensions }: DemoPermit, renewed: readonly Date[]): Date[] {
  return suspensions.flatMap(({ fromAt, untilAt }) => {
    const last = renewed.findLast((when) => when < fromAt)
    return last !== undefined && hoursAfter(last, 24) < untilAt ? [hoursAfter(fromAt, -3.5)] : []
  })
}

/** Renewals where the validity would end before the next step. */
function bridge(permit: DemoPermit, until: () => Date, next: Date, renew: (when: Date) => void): void {
  while (until() < next && permit.expiredLiveAt?.getTime() !== until().getTime()) {
    const before = until()
    renew(minutesAfter(before, -40))
    if (until() <= before)
      throw new Error(`${permit.number} cannot be renewed beyond ${before.toISOString()}`)
  }
}

/**
 * On the afternoon before heating began, the crane was needed over SG-05 once more. A lock on which a live permit rests
 * stays on, so the holder handed back, the officer looked and returned it, and all points were locked and verified anew.
 */
export const LOCKS_MOVED = {
  from: at('2026-11-04 15:05'),
  off: at('2026-11-04 15:36'),
  until: at('2026-11-04 17:20'),
}

function moveLocks(story: Story, { holder }: DemoPermit, officer: PersonKey): void {
  story.add('hand-back', 'handed-back', LOCKS_MOVED.from, holder, '', {
    outcome: 'stopped',
    plantState: 'Cold, nothing energised; one cover of the bars is still missing and needs the crane',
    peopleClear: true,
    toolsOut: true,
    hottestC: 19,
    locks: 'left',
    locksText: 'All six, until the officer has looked',
  })
  story.add(
    'return-to-holder',
    'suspended',
    minutesAfter(LOCKS_MOVED.from, 25),
    officer,
    'Bring the last cover in with the locks off, then lock and verify all six points anew before it goes on',
  )
  story.add('site-check', 'suspended', minutesAfter(LOCKS_MOVED.until, -12), holder, '', SITE_CHECK)
  story.add(
    'resume',
    'issued',
    LOCKS_MOVED.until,
    officer,
    'Last cover is on, all points locked and verified again',
  )
}

function stop(story: Story, permit: DemoPermit, pause: PermitPause, mate: PersonKey): void {
  const { holder } = peopleOf(permit)
  const officer = officerAt(pause.untilAt, 'ione')
  story.add('suspend', 'suspended', pause.fromAt, mate, pause.reason)
  story.add('made-safe', 'suspended', minutesAfter(pause.fromAt, 6), holder, '', {
    who: nameOf(PERSON_ID[mate]),
    at: minutesAfter(pause.fromAt, 4).toISOString(),
    how: 'Supply switched off at the set and its breaker locked; the tube cools behind its barriers',
  })
  story.add('site-check', 'suspended', minutesAfter(pause.untilAt, -15), holder, '', SITE_CHECK)
  story.add('resume', 'issued', pause.untilAt, officer, 'Cause mended and looked at; tests repeated')
}

/** When an officer lengthened the window, and why. */
function extensionOf(permit: DemoPermit): { when: Date; reason: string } | null {
  if (permit.extendedFrom === undefined) return null
  return permit.number === 'HSP-2026-030'
    ? {
        when: at('2026-11-06 14:20'),
        reason: 'Soak ends in the night of Sunday; by Tuesday morning it will not be cold',
      }
    : { when: at('2026-09-15 15:10'), reason: 'Heating stopped for three hours on Friday, so it cools later' }
}

/** When the holder handed it back for good; null while it is live. */
function overAt(permit: DemoPermit, window: { untilAt: Date }): Date | null {
  if (permit.state === 'issued') return null
  if (permit.expiredLiveAt !== undefined) return minutesAfter(permit.expiredLiveAt, 50)
  const cold = jobOf(permit)?.bake?.coldAt
  return cold == null ? hoursAfter(window.untilAt, -1) : minutesAfter(cold, 50)
}

function handBack(story: Story, permit: DemoPermit, over: Date, approvedBy: PersonKey): Date {
  const { holder } = peopleOf(permit)
  const job = jobOf(permit)
  const late = permit.expiredLiveAt !== undefined
  const complete = job?.bake == null || job.bake.outcome === 'complete'
  const detail = {
    outcome: complete ? 'complete' : 'stopped',
    plantState: 'Supply off and locked, barriers still up',
    peopleClear: true,
    toolsOut: true,
    hottestC: job?.kind === 'bake' ? 38 : 29,
    locks: 'left',
    locksText: 'All of them, until this is signed; they come off before the inspection',
  }
  const reason = late ? 'Blanket was switched off after the permit had run out' : ''
  story.add('hand-back', 'handed-back', over, holder, reason, detail)
  let last = over
  if (permit.handBackRefused !== undefined) {
    const refused = permit.handBackRefused.split(';')[0]
    story.add('return-to-holder', 'suspended', minutesAfter(over, 40), approvedBy, refused)
    last = minutesAfter(over, 160)
    story.add('hand-back', 'handed-back', last, holder, 'Covers back on and screwed down', detail)
  }
  const weekend = [0, 6].includes(new TZDate(last.getTime(), DEMO_ZONE).getDay())
  const inspected = weekend ? dayAfter(last, 2, 8, 40) : minutesAfter(last, 35)
  story.add('cancel', 'cancelled', inspected, officerAt(inspected, 'ione'), '', {
    inspection: 'Walked from barrier to barrier: clear, covers on, nothing hot',
    lessons: late
      ? 'Everybody knew the window and nobody looked at the clock: an alarm on the tablet from now on'
      : '',
  })
  return last
}
