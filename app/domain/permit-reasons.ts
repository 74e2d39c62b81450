/** Why something cannot be done to a permit: each reason names the rule and the way out. */
import { PERMIT_STATE_LABELS, type PermitAct, type PermitState } from './permit-words.ts'

export interface Reason {
  /** The permit's state, the person who wants to act, a condition that is not met, or what was typed. */
  kind: 'state' | 'person' | 'condition' | 'input'
  /** The rule, for programs. */
  code: string
  text: string
  /** Field of the act's form that it belongs to. */
  field?: string
}

/** What comes next for a permit in each state. */
const NEXT: Record<PermitState, string> = {
  draft: 'It is being prepared: it can be changed, asked for or discarded.',
  requested: 'It waits for a safety officer, who can approve, return or refuse it.',
  returned: 'It can be changed and asked for again, or withdrawn.',
  refused: 'It has ended. Ask for a new permit.',
  approved: 'It waits for its holder to accept it at the segment.',
  issued: 'It is live. Suspend it before anything about it is changed.',
  suspended: 'Work is stopped: an officer resumes it after a re-check, or its holder hands it back.',
  expired:
    'Its time has run out for good: have heating off, hand it back, and ask for a new permit if work is to go on.',
  'handed-back': 'It waits for an officer to inspect the place and cancel it, or return it to its holder.',
  cancelled: 'It has ended. Ask for a new permit.',
  lapsed: 'It was not taken up in time. Ask for a new permit.',
  withdrawn: 'It has ended. Ask for a new permit.',
  discarded: 'It has ended. Ask for a new permit.',
}

const GERUNDS: Record<PermitAct, string> = {
  draft: 'Drafting',
  edit: 'Editing',
  request: 'Asking for it',
  return: 'Returning it',
  refuse: 'Refusing it',
  approve: 'Approving',
  'change-terms': 'Changing its terms',
  withdraw: 'Withdrawing it',
  discard: 'Discarding it',
  lapse: 'Lapsing',
  'site-check': 'The site check',
  accept: 'Accepting it',
  'hand-over': 'Handing it over',
  revalidate: 'Revalidating',
  extend: 'Extending it',
  suspend: 'Suspending it',
  'made-safe': 'Noting how it was made safe',
  resume: 'Resuming it',
  expire: 'Expiring',
  'hand-back': 'Handing it back',
  'return-to-holder': 'Returning it to its holder',
  cancel: 'Cancelling it',
}

/** The permit is in a state in which this is not done. */
export function wrongState(act: PermitAct, state: PermitState, from: readonly PermitState[]): Reason {
  const needed = from.map((each) => PERMIT_STATE_LABELS[each].toLowerCase())
  const list = needed.length < 2 ? needed.join('') : `${needed.slice(0, -1).join(', ')} or ${needed.at(-1)}`
  return {
    kind: 'state',
    code: 'wrong-state',
    text: `${GERUNDS[act]} is for a permit that is ${list}; this one is ${PERMIT_STATE_LABELS[state].toLowerCase()}. ${NEXT[state]}`,
  }
}

export function personReason(code: string, text: string): Reason {
  return { kind: 'person', code, text }
}

export function condition(code: string, text: string): Reason {
  return { kind: 'condition', code, text }
}

export function inputReason(field: string, text: string): Reason {
  return { kind: 'input', code: 'input', text, field }
}

/** Elapsed time in words: `3 h 20 min`; below a minute in seconds. */
export function spanText(ms: number): string {
  const minutes = Math.floor(ms / 60_000)
  if (minutes < 1) return `${Math.max(0, Math.floor(ms / 1000))} s`
  const hours = Math.floor(minutes / 60)
  const rest = minutes % 60
  if (hours === 0) return `${rest} min`
  return rest === 0 ? `${hours} h` : `${hours} h ${rest} min`
}
