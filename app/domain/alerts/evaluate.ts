/**
 * Judges one rule on one subject over a window: readings and facts in, events out, in the order of the data's own time.
 * Pure. What has to be known from before travels in `memory`, so that a night in pieces gives what the night at once
 * gives. Data that come late for time already judged are the caller's: it judges again from an earlier memory.
 */
import type { AlertRuleContent } from '../alert-rules.ts'
import type { AlertCondition } from '../alert-words.ts'
import type { AlertEvent, AlertSubject, AlertWindow, Evaluation, FactsOf } from './facts.ts'
import { figureFaults } from './figures.ts'
import { type Judge, kept, type Verdict } from './judge.ts'
import { judgeFor } from './judges.ts'
import { Occurrence } from './occurrence.ts'
import { notWatchedText, watchedPieces } from './watched.ts'

const VERSION = 1

/**
 * Evaluates a rule.
 *
 * @param facts may reach beyond the window; only what lies in it is judged
 * @param memory of the window before, as this function gave it; null to begin anew
 */
export function evaluate<C extends AlertCondition>(
  condition: C,
  content: AlertRuleContent,
  subject: AlertSubject,
  facts: FactsOf[C],
  memory: unknown,
  { from, until }: AlertWindow,
): Evaluation {
  const faults = figureFaults(condition, content)
  if (faults.length > 0) {
    return { events: [], memory, evaluable: false, why: faults.join(' ').slice(0, 300), suppressed: null }
  }
  const known = kept(memory, 'version') === VERSION && kept(memory, 'condition') === condition ? memory : null
  const occurrence = new Occurrence(subject, kept(known, 'occurrence'))
  const make = (judgeMemory: unknown): Judge =>
    judgeFor(condition, { content, subject, facts, memory: judgeMemory })
  let judge = make(kept(known, 'judge') ?? null)
  const events: AlertEvent[] = []
  let verdict: Verdict | null = null
  let suppressed: Evaluation['suppressed'] = null
  for (const piece of watchedPieces(facts.states, content.suppressedIn, from.getTime(), until.getTime())) {
    if (piece.by === null) {
      events.push(...occurrence.take(judge.run(piece.fromMs, piece.untilMs)))
      verdict = judge.verdict(piece.untilMs)
      suppressed = null
    } else {
      const why = notWatchedText(piece.by)
      events.push(...occurrence.stop(piece.fromMs, why))
      judge = make(null)
      verdict = { evaluable: false, why }
      suppressed = { state: piece.by.state, since: new Date(piece.by.sinceMs) }
    }
  }
  const { evaluable, why } = verdict ?? judge.verdict(until.getTime())
  return {
    events,
    memory: { version: VERSION, condition, judge: judge.memory(), occurrence: occurrence.memory() },
    evaluable,
    why: why.slice(0, 300),
    suppressed,
  }
}
