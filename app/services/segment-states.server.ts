/** Setting the state of a segment: by a person, with since-when and a reason, one open state at a time. */
import type { Db } from '../db/client.server.ts'
import { closeState, insertState, lockSegment, openState } from '../db/queries/segment-states.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { isUsualChange, SEGMENT_STATES, type SegmentState } from '../domain/segment-states.ts'
import { writeRecord } from './record.server.ts'

const AHEAD_MS = 5 * 60_000

export interface StateChange {
  tag: string
  from: SegmentState
  state: SegmentState
  since: Date
  reason: string
  /** The person has been told that the change is unusual and means it. */
  unusual: boolean
}

/**
 * Sets a segment's state.
 *
 * @throws DomainError forbidden, not-found, conflict (somebody else changed it meanwhile), bad-input
 */
export async function setSegmentState(db: Db, actor: Actor, now: Date, change: StateChange): Promise<void> {
  demand(actor, 'segment-state:set')
  const field = (name: string, message: string) =>
    new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: { [name]: [message] },
    })
  if (change.since.getTime() > now.getTime() + AHEAD_MS) {
    throw field('since', 'This lies in the future. Set the state when it has changed.')
  }
  await tx(db, async (inside) => {
    // The lock makes two people who press at once come one after the other.
    const segment = await lockSegment(inside, change.tag)
    if (segment === null) throw new DomainError('not-found', `The register has no segment ${change.tag}.`)
    const open = await openState(inside, segment.id)
    const current = open?.state ?? 'unknown'
    if (current !== change.from) {
      throw new DomainError(
        'conflict',
        `${change.tag} is now "${SEGMENT_STATES[current].label}" (set by ${open?.setBy ?? 'nobody'}), no longer "${SEGMENT_STATES[change.from].label}". Look again before you change it.`,
      )
    }
    if (current === change.state)
      throw field('state', `${change.tag} is already "${SEGMENT_STATES[current].label}".`)
    if (open !== null && change.since <= open.since) {
      throw field('since', `The present state began later than this. Give a time after its beginning.`)
    }
    if (!isUsualChange(current, change.state) && !change.unusual) {
      throw field(
        'unusual',
        `From "${SEGMENT_STATES[current].label}" to "${SEGMENT_STATES[change.state].label}" is not the usual way. If it is what happened, tick the box and say so in the reason.`,
      )
    }
    if (open !== null) await closeState(inside, open.id, change.since)
    await insertState(inside, {
      segmentId: segment.id,
      state: change.state,
      since: change.since,
      reason: change.reason,
      setBy: actor.personId,
      recordedAt: now,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'segment state set',
      subjectKind: 'segment',
      subjectId: change.tag,
      effectiveAt: change.since,
      before: { state: current },
      after: { state: change.state },
      reason: change.reason,
    })
  })
}
