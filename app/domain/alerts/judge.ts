/** What every condition is made of: parts that turn on and off, each by itself a reason for the one alert. */
import type { AlertRuleContent } from '../alert-rules.ts'
import type { AlertPriority } from '../alert-words.ts'
import type { AlertSubject, Disturbance, LimitStretch, Stretch } from './facts.ts'

/** A part has turned on or off. Turned on once more with a higher priority it has grown worse. */
export interface Change {
  part: string
  on: boolean
  atMs: number
  sinceMs: number
  priority: AlertPriority
  value: number | null
  limit: number | null
  unit: string
  /** What and how bad, without the place. */
  what: string
  text: string
  more?: Record<string, unknown>
}

export interface Verdict {
  evaluable: boolean
  why: string
}
export const EVALUABLE: Verdict = { evaluable: true, why: '' }

export function notEvaluable(why: string): Verdict {
  return { evaluable: false, why }
}

/** Walks through a stretch that is watched, from where it stopped last. */
export interface Judge {
  /** Changes in any order, each at or after `fromMs` and before `untilMs`. */
  run(fromMs: number, untilMs: number): Change[]
  /** Whether it can tell at the end of the stretch it ran last. */
  verdict(untilMs: number): Verdict
  memory(): unknown
}

/** What a condition gets to build its judge of. `memory` is what its own `memory()` gave, or null. */
export interface Case<Facts> {
  content: AlertRuleContent
  subject: AlertSubject
  facts: Facts
  memory: unknown
}

/** A figure of the rule; the figures have been checked before. */
export function figure({ content }: Pick<Case<unknown>, 'content'>, name: string): number {
  return content.figures[name] ?? Number.NaN
}

/** A part of a kept memory by its name; undefined where there is none. */
export function kept(memory: unknown, name: string): unknown {
  return typeof memory === 'object' && memory !== null ? (memory as Record<string, unknown>)[name] : undefined
}

function holds(stretch: Stretch, ms: number): boolean {
  return stretch.fromMs <= ms && (stretch.toMs === null || ms < stretch.toMs)
}

/** Whether one of the stretches holds at an instant. */
export function heldAt(stretches: readonly Stretch[], ms: number): boolean {
  return stretches.some((stretch) => holds(stretch, ms))
}

/** Answers for ascending instants what value holds; asks the list only when the answer may have changed. */
export function stepper(stretches: readonly LimitStretch[], otherwise: number): (ms: number) => number {
  if (stretches.length === 0) return () => otherwise
  let value = otherwise
  let fromMs = Number.POSITIVE_INFINITY
  let toMs = Number.NEGATIVE_INFINITY
  return (ms) => {
    if (ms >= fromMs && ms < toMs) return value
    // The one that began last holds, as when a limit is written over another.
    const holding = stretches.filter((one) => holds(one, ms)).sort((a, b) => b.fromMs - a.fromMs)[0]
    value = holding?.value ?? otherwise
    fromMs = ms
    toMs = Number.POSITIVE_INFINITY
    for (const one of stretches) {
      if (one.fromMs > ms) toMs = Math.min(toMs, one.fromMs)
      if (one.toMs !== null && one.toMs > ms) toMs = Math.min(toMs, one.toMs)
    }
    return value
  }
}

/** Answers for ascending instants when the newest disturbance was; null before the first. */
export function lastDisturbance(disturbances: readonly Disturbance[]): (ms: number) => number | null {
  if (disturbances.length === 0) return () => null
  const starts = disturbances.map(({ atMs }) => atMs).sort((a, b) => a - b)
  let next = 0
  return (ms) => {
    while (next < starts.length && (starts[next] as number) <= ms) next += 1
    return starts[next - 1] ?? null
  }
}

/** Answers for ascending instants whether a disturbance was less than so long ago. */
export function quietTimes(disturbances: readonly Disturbance[], lastsS: number): (ms: number) => boolean {
  const last = lastDisturbance(disturbances)
  return (ms) => {
    const disturbed = last(ms)
    return disturbed !== null && ms < disturbed + 1000 * lastsS
  }
}

/** Value of a straight course at ascending instants; NaN where nothing is planned. */
export function follow(
  course: { at: ArrayLike<number>; value: ArrayLike<number> } | null,
): (ms: number) => number {
  if (course === null || course.at.length === 0) return () => Number.NaN
  const { at, value } = course
  let i = 0
  return (ms) => {
    if (ms < (at[0] as number) || ms > (at[at.length - 1] as number)) return Number.NaN
    while (i + 1 < at.length && (at[i + 1] as number) <= ms) i += 1
    const left = at[i] as number
    const right = at[i + 1]
    const low = value[i] as number
    if (right === undefined || right === left) return low
    return low + (((value[i + 1] as number) - low) * (ms - left)) / (right - left)
  }
}
