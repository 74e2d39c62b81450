/** How far a permit has come: the states of its way from the draft to its end, with when each was reached. */
import { ENDED_PERMIT_STATES, PERMIT_STATE_LABELS, type PermitState } from './permit-words.ts'

export interface PermitStage {
  state: PermitState
  label: string
  status: 'done' | 'now' | 'coming'
  /** When it was reached last; null for what is still to come. */
  at: Date | null
  /** Off the usual way: sent back, stopped, run out, ended without work. */
  odd: boolean
}

/** The way of a permit with which nothing goes wrong. */
const WAY: readonly PermitState[] = ['draft', 'requested', 'approved', 'issued', 'handed-back', 'cancelled']

/** Where a state off that way stands in it: behind this one. */
const BEHIND: Partial<Record<PermitState, PermitState>> = {
  returned: 'requested',
  refused: 'requested',
  lapsed: 'approved',
  withdrawn: 'approved',
  discarded: 'draft',
  suspended: 'issued',
  expired: 'issued',
}

/**
 * Stages in order. Of what lies off the way only what still matters is shown: the present state, and that a permit ran
 * out before it was handed back.
 *
 * @param acts everything done so far, in order, with the state that it led to
 */
export function permitStages(
  state: PermitState,
  acts: readonly { toState: PermitState; at: Date }[],
): PermitStage[] {
  const reached = timesReached(acts)
  const ranOut = reached.has('expired') && (state === 'handed-back' || state === 'cancelled')
  const odd: PermitState[] = [
    ...(ranOut ? (['expired'] as const) : []),
    ...(WAY.includes(state) ? [] : [state]),
  ]
  const way = WAY.flatMap((each) => [
    each,
    ...odd.filter(
      (one) => (one === 'discarded' && reached.has('requested') ? 'requested' : BEHIND[one]) === each,
    ),
  ])
  const here = way.indexOf(state)
  const ended = ENDED_PERMIT_STATES.includes(state)
  return (ended ? way.slice(0, here + 1) : way).map((each, i) => ({
    state: each,
    label: PERMIT_STATE_LABELS[each],
    status: i < here ? 'done' : i === here ? 'now' : 'coming',
    at: i <= here ? (reached.get(each) ?? null) : null,
    odd: !WAY.includes(each),
  }))
}

/** When each state was entered last. An act that leaves the state as it is enters nothing. */
function timesReached(acts: readonly { toState: PermitState; at: Date }[]): Map<PermitState, Date> {
  const reached = new Map<PermitState, Date>()
  let before: PermitState | null = null
  for (const { toState, at } of acts) {
    if (toState !== before) reached.set(toState, at)
    before = toState
  }
  return reached
}
