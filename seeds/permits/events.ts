/** What was dangerous about permits of the demo, and what people said of their heating. All of it is over. */
import type { heatingStatement, safetyEvent } from '../../app/db/schema/index.ts'
import { instantText } from '../../app/domain/instant-text.ts'
import type { SafetyEventKind } from '../../app/domain/permit-words.ts'
import { occurrenceKey } from '../../app/domain/safety-events.ts'
import { DEMO_ZONE } from '../demo-time.ts'
import { hoursAfter } from '../log/entry.ts'
import { PERSON_ID } from '../people.ts'
import { segmentOf } from '../register/segments.ts'
import { PERMITS } from '../scenario/permits.ts'

type EventRow = typeof safetyEvent.$inferInsert
type StatementRow = typeof heatingStatement.$inferInsert

/** How long a blanket stayed on after its permit had run out, hours. */
const ON_TOO_LONG_HOURS = 22 / 60

function event(
  kind: SafetyEventKind,
  permitId: number,
  { number, segments }: (typeof PERMITS)[number],
  [startedAt, endedAt]: [Date, Date],
  text: string,
  endReason: string,
): EventRow {
  return {
    kind,
    permitId,
    segmentId: segmentOf(segments[0] as string).id,
    occurrenceKey: occurrenceKey(number, { kind, startedAt, what: '', text }),
    startedAt,
    noticedAt: startedAt,
    text,
    endedAt,
    endReason,
  }
}

/** Every stop of work, and the one permit that ran out with its heating on. */
export function eventRows(): EventRow[] {
  return PERMITS.flatMap((demo, index) => {
    const { number, suspensions, expiredLiveAt } = demo
    const place = demo.segments.join(' and ')
    const when = (at: Date) => instantText(at, DEMO_ZONE)
    const stops = suspensions.map(({ fromAt, untilAt }) =>
      event(
        'permit-suspended',
        index + 1,
        demo,
        [fromAt, untilAt],
        `${number} (${place}) was suspended at ${when(fromAt)}.`,
        `${number} is issued (live).`,
      ),
    )
    if (expiredLiveAt === undefined) return stops
    const off = hoursAfter(expiredLiveAt, ON_TOO_LONG_HOURS)
    return [
      ...stops,
      event(
        'expired-while-heated',
        index + 1,
        demo,
        [expiredLiveAt, off],
        `${number} ran out at ${when(expiredLiveAt)} while ${place} was heated. A person said so.`,
        'Blanket unplugged, seen cold',
      ),
    ]
  })
}

/** Of the blanket that stayed on too long: nothing but a person's word tells whether one is on. */
export function statementRows(): StatementRow[] {
  return PERMITS.flatMap(({ expiredLiveAt, segments, holder, window }) => {
    if (expiredLiveAt === undefined || window === null) return []
    const segmentId = segmentOf(segments[0] as string).id
    const personId = PERSON_ID[holder]
    const said = (on: boolean, when: Date, how: string) => ({
      segmentId,
      on,
      at: when,
      how,
      personId,
      recordedAt: hoursAfter(when, 4 / 60),
    })
    return [
      said(true, hoursAfter(window.fromAt, 1), 'Breaker closed, lamp of the blanket on'),
      said(false, hoursAfter(expiredLiveAt, ON_TOO_LONG_HOURS), 'Blanket unplugged, seen cold'),
    ]
  })
}
