/** Groups of permit states by which the register is narrowed. */
import { ENDED_PERMIT_STATES, type PermitState } from './permit-words.ts'

export const PERMIT_GROUPS = ['open', 'live', 'waiting', 'ended', 'all'] as const
export type PermitGroup = (typeof PERMIT_GROUPS)[number]

export const PERMIT_GROUP_LABELS: Record<PermitGroup, string> = {
  open: 'Not ended',
  live: 'At the site',
  waiting: 'Before work',
  ended: 'Ended',
  all: 'All',
}

/** States in which heat, locks or people may be at the segment. */
export const AT_THE_SITE: readonly PermitState[] = ['issued', 'suspended', 'expired', 'handed-back']

const BEFORE_WORK: readonly PermitState[] = ['draft', 'requested', 'returned', 'approved']

/** States of a group; undefined where the group leaves none out. */
export function statesOfGroup(group: PermitGroup): readonly PermitState[] | undefined {
  switch (group) {
    case 'open':
      return [...BEFORE_WORK, ...AT_THE_SITE]
    case 'live':
      return AT_THE_SITE
    case 'waiting':
      return BEFORE_WORK
    case 'ended':
      return ENDED_PERMIT_STATES
    case 'all':
      return undefined
  }
}
