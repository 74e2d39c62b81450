import { choice, type QuestionList, question } from './questions.ts'
import type { Fault } from './tally.ts'
import type { Remark } from './types.ts'
import { offsetAt, offsetText, type ZoneClock } from './zones.ts'

const DAY_MS = 86_400_000

/** Watches the offsets from UTC that are written in the times of a file. */
export class OffsetWatch {
  readonly #siteZone: string | null
  #offset = Number.NaN
  #atMs = Number.NaN
  #changed = false

  constructor(siteZone: string | null) {
    this.#siteZone = siteZone
  }

  /** Whether the offset changes here other than the clocks of the site do; the first change is told apart. */
  see(offset: number, atMs: number): 'first' | 'again' | null {
    const before = this.#offset
    const beforeMs = this.#atMs
    this.#offset = offset
    this.#atMs = atMs
    if (Number.isNaN(before) || Number.isNaN(offset) || offset === before) return null
    const zone = this.#siteZone
    if (zone !== null && offsetAt(zone, beforeMs) === before && offsetAt(zone, atMs) === offset) return null
    const change = this.#changed ? 'again' : 'first'
    this.#changed = true
    return change
  }
}

/** What to say where the offset changes for the first time. */
export function offsetRemark(line: number, atMs: number): Remark {
  const text = `The offset from UTC in the times changes at line ${line}. Each time counts as it is written.`
  return { kind: 'offset-change', text, line, channel: null, atMs, count: 1 }
}

/** Asks about a time that the clocks of the zone leave out: the clock of the logger probably does not change. */
export function askClockChanges(
  wallMs: number,
  fault: Fault,
  line: number,
  clock: ZoneClock | null,
  questions: QuestionList,
): void {
  const zone = clock?.zone ?? 'UTC'
  if (questions.answer('clock-changes') !== null) return
  const winter = offsetText(offsetAt(zone, wallMs - DAY_MS))
  questions.ask('clock-changes', () =>
    question({
      ...fault,
      code: 'clock-changes',
      id: 'clock-changes',
      kind: 'zone',
      blocking: false,
      line,
      text: `The file has times that ${zone} leaves out when its clocks go forward. Does the clock of this source follow the clock changes?`,
      mend: 'Ask whoever set the logger up. Until it is said, rows of that hour are left out.',
      choices: [
        choice(winter, `it does not: it stays at ${winter} all year`),
        choice('leave-out', 'it does; leave the rows of that hour out'),
      ],
    }),
  )
}
