/** Reading by reading: one or several findings, each about one series and with delays of its own. */
import type { AlertPriority } from '../alert-words.ts'
import type { Series } from './facts.ts'
import { type Case, type Change, EVALUABLE, type Judge, kept, notEvaluable } from './judge.ts'
import { Latch, type Zone } from './latch.ts'
import { bridgeMs, firstAt, named, silenceText, utcText } from './series.ts'

export interface PartRule {
  part: string
  series: Series
  unit: string
  priority: AlertPriority
  /** Begins a walk: what comes back is asked for each reading in order. */
  start: () => (index: number, at: number) => Zone
  describe: (value: number, at: number, on: boolean) => { limit: number | null; what: string; text: string }
  /** Whether no limit holds at an instant, so that nothing could be judged. */
  unlimited?: (at: number) => boolean
  /** -1 where low values are the bad ones. */
  sign?: 1 | -1
}

/** Judges all parts; it can tell as long as each series says something. */
export function judgeParts(
  { content, memory }: Pick<Case<unknown>, 'content' | 'memory'>,
  rules: readonly PartRule[],
): Judge {
  const latches = rules.map(
    ({ part, series }) =>
      new Latch(
        content.onDelayS * 1000,
        content.offDelayS * 1000,
        bridgeMs(series),
        kept(memory, `latch:${part}`),
      ),
  )
  let ranFromMs = Number.NEGATIVE_INFINITY
  return {
    run(fromMs, untilMs) {
      ranFromMs = fromMs
      const changes: Change[] = []
      for (const [k, rule] of rules.entries()) walk(rule, latches[k] as Latch, fromMs, untilMs, changes)
      return changes
    },
    verdict(untilMs) {
      for (const [k, { series, unlimited }] of rules.entries()) {
        const known = (latches[k] as Latch).knownMs
        if (known !== null && untilMs - known <= bridgeMs(series)) continue
        if (unlimited?.(untilMs - 1) === true) {
          return notEvaluable(`${series.tag}: no limit holds at ${utcText(untilMs)}.`)
        }
        return notEvaluable(silenceText(series, known, ranFromMs, untilMs))
      }
      return rules.length === 0 ? notEvaluable('Nothing of it is measured.') : EVALUABLE
    },
    memory: () =>
      Object.fromEntries(rules.map(({ part }, k) => [`latch:${part}`, (latches[k] as Latch).memory()])),
  }
}

function walk(rule: PartRule, latch: Latch, fromMs: number, untilMs: number, changes: Change[]): void {
  const { series, sign = 1 } = rule
  const zoneAt = rule.start()
  const end = firstAt(series.at, untilMs)
  for (let i = firstAt(series.at, fromMs); i < end; i += 1) {
    const at = series.at[i] as number
    const value = named(series, i)
    const turned = latch.step(at, zoneAt(i, at), value, sign)
    if (turned === 0) continue
    changes.push({
      part: rule.part,
      on: turned === 1,
      atMs: at,
      sinceMs: latch.since(turned, at),
      priority: rule.priority,
      value,
      unit: rule.unit,
      ...rule.describe(value, at, turned === 1),
      more: { peak: latch.peak },
    })
  }
}
