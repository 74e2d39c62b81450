/** Series and calls made for the tests of alerts. */
import { ALERT_DEFAULTS } from '#app/domain/alert-defaults.ts'
import type { AlertRuleContent } from '#app/domain/alert-rules.ts'
import type { AlertCondition } from '#app/domain/alert-words.ts'
import { evaluate } from '#app/domain/alerts/evaluate.ts'
import type { AlertEvent, AlertSubject, Evaluation, FactsOf, Series } from '#app/domain/alerts/facts.ts'
import { type Quality, qualityCode } from '#app/domain/readings.ts'

/** The night in which the tests play. */
export const T0 = Date.parse('2026-11-08T20:00:00.000Z')
export const MIN = 60_000
export const HOUR = 3_600_000
export const DAY = 24 * HOUR
export const COMMON = { states: [], disturbances: [] }
const SUBJECT: AlertSubject = { kind: 'position', tag: 'HC-01A', segment: 'SG-01' }

/** A number is a good value; a word a reading of that quality; a pair of both a bound. Null is no line at all. */
export type Cell = number | Quality | readonly [Quality, number] | null

/** Cells one period apart from T0 on. */
export function series(tag: string, periodS: number, cells: readonly Cell[], fromMs = T0): Series {
  const at: number[] = []
  const value: number[] = []
  const quality: number[] = []
  const bound: number[] = []
  for (const [i, cell] of cells.entries()) {
    if (cell === null) continue
    at.push(fromMs + i * periodS * 1000)
    value.push(typeof cell === 'number' ? cell : Number.NaN)
    quality.push(qualityCode(typeof cell === 'number' ? 'good' : typeof cell === 'string' ? cell : cell[0]))
    bound.push(typeof cell === 'object' ? cell[1] : Number.NaN)
  }
  return { tag, periodS, at, value, quality, marks: at.map(() => 0), bound }
}

export function repeat<T>(count: number, cell: T): T[] {
  return Array.from({ length: count }, () => cell)
}

function rule(condition: AlertCondition, changed: Partial<AlertRuleContent> = {}): AlertRuleContent {
  return { ...ALERT_DEFAULTS[condition], suppressedIn: [], ...changed }
}

interface Asked<C extends AlertCondition> {
  condition: C
  facts: FactsOf[C]
  fromMs?: number
  untilMs: number
  content?: Partial<AlertRuleContent>
  subject?: AlertSubject
  memory?: unknown
}

export function judged<C extends AlertCondition>(asked: Asked<C>): Evaluation {
  return evaluate(
    asked.condition,
    rule(asked.condition, asked.content),
    asked.subject ?? SUBJECT,
    asked.facts,
    asked.memory ?? null,
    { from: new Date(asked.fromMs ?? T0), until: new Date(asked.untilMs) },
  )
}

/** In pieces that end at the given instants; the memory goes through JSON between them. */
export function inPieces<C extends AlertCondition>(asked: Asked<C>, ends: readonly number[]): Evaluation {
  let memory: unknown = null
  let fromMs = asked.fromMs ?? T0
  const events: AlertEvent[] = []
  let last: Evaluation | null = null
  for (const untilMs of [...ends, asked.untilMs].sort((a, b) => a - b)) {
    last = judged({ ...asked, fromMs, untilMs, memory: JSON.parse(JSON.stringify(memory)) as unknown })
    events.push(...last.events)
    memory = last.memory
    fromMs = untilMs
  }
  if (last === null) throw new Error('no piece')
  return { ...last, events }
}

/** Events as `kind +minutes` (since +minutes), for literal expectations. */
export function told({ events }: Evaluation, zeroMs = T0): string[] {
  return events.map(
    ({ kind, at, since, priority }) =>
      `${kind} +${(at.getTime() - zeroMs) / MIN} since +${(since.getTime() - zeroMs) / MIN} ${priority}`,
  )
}
