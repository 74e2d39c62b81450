/** Words of what can be done on a permit's page: the button, what it does, and what the form asks for. */
import type { OfferedAct } from '#app/domain/permit-offers.ts'

interface ActWords {
  button: string
  /** What it does, before the form. */
  does: string
  kind: 'plain' | 'primary' | 'danger'
  /** Label of the reason, where one is asked for. */
  reason: string
}

export const ACT_WORDS: Record<OfferedAct, ActWords> = {
  request: {
    button: 'Ask for it',
    does: 'The permit goes to the safety officers as it stands. It can still be taken back.',
    kind: 'primary',
    reason: '',
  },
  approve: {
    button: 'Approve',
    does: 'You agree in principle and for the window. Nobody may heat yet: that begins with the holder’s acceptance on site.',
    kind: 'primary',
    reason: '',
  },
  return: {
    button: 'Send back',
    does: 'It goes back to whoever asked, with everything in it kept.',
    kind: 'danger',
    reason: 'What has to change',
  },
  refuse: {
    button: 'Refuse',
    does: 'It ends here, with your reason on it. A new permit can be asked for.',
    kind: 'danger',
    reason: 'Why it is refused',
  },
  accept: {
    button: 'Accept on site',
    does: 'You take the permit at the segment, after the site check, and it is live from this moment. You answer for what happens under it.',
    kind: 'primary',
    reason: '',
  },
  revalidate: {
    button: 'Revalidate',
    does: 'You have looked at the place and it may go on. The validity counts from now.',
    kind: 'primary',
    reason: '',
  },
  'hand-over': {
    button: 'Take it over',
    does: 'You become its holder. Whoever has held it stands beside you or reads the state of the work back to you.',
    kind: 'plain',
    reason: '',
  },
  'hand-back': {
    button: 'Hand back',
    does: 'Work under it has ended. An officer inspects the site before it is cancelled.',
    kind: 'plain',
    reason: '',
  },
  extend: {
    button: 'Extend',
    does: 'The window gets longer: at most twice, and by 72 h in all. The current validity stays as it is.',
    kind: 'plain',
    reason: 'Why the window has to be longer',
  },
  'made-safe': {
    button: 'Made safe',
    does: 'Write down who made the place safe, when and how. This switches nothing off.',
    kind: 'plain',
    reason: '',
  },
  resume: {
    button: 'Let it go on',
    does: 'It is live again until the end of the validity it had, and not longer.',
    kind: 'primary',
    reason: 'What was put right',
  },
  cancel: {
    button: 'Cancel',
    does: 'You have inspected the site. The permit ends for good, and its posted copies come down.',
    kind: 'primary',
    reason: '',
  },
  'return-to-holder': {
    button: 'Back to the holder',
    does: 'The inspection found something. The permit is suspended until that is put right.',
    kind: 'danger',
    reason: 'What has to be put right first',
  },
  suspend: {
    button: 'Stop the work',
    does: 'Anybody may stop work. Only an officer lets it go on.',
    kind: 'danger',
    reason: 'Why work stops',
  },
  withdraw: {
    button: 'Withdraw',
    does: 'It is taken back before work has begun, and ends.',
    kind: 'danger',
    reason: 'Why it is taken back',
  },
  discard: {
    button: 'Discard the draft',
    does: 'The draft ends. It stays readable and keeps its number.',
    kind: 'danger',
    reason: '',
  },
}

/** The look of an act's button: one that would be refused is not the button to press first. */
export function kindOf(act: OfferedAct, reasons: readonly string[]): ActWords['kind'] {
  const { kind } = ACT_WORDS[act]
  return kind === 'primary' && reasons.length > 0 ? 'plain' : kind
}
