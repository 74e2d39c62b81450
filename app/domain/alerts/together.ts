/** Several series walked through by their common instants. */
import type { Series } from './facts.ts'
import { firstAt } from './series.ts'

/**
 * Calls for each instant at which any of the series has a reading, in order, once for each reading and then once for
 * the instant.
 */
export function walkTogether(
  all: readonly Series[],
  fromMs: number,
  untilMs: number,
  onReading: (which: number, index: number, at: number) => void,
  onInstant: (at: number) => void,
): void {
  const next = all.map(({ at }) => firstAt(at, fromMs))
  for (;;) {
    let at = untilMs
    for (let k = 0; k < all.length; k += 1) {
      const ahead = (all[k] as Series).at[next[k] as number]
      if (ahead !== undefined && ahead < at) at = ahead
    }
    if (at >= untilMs) return
    for (let k = 0; k < all.length; k += 1) {
      const series = all[k] as Series
      for (let i = next[k] as number; series.at[i] === at; i += 1) {
        onReading(k, i, at)
        next[k] = i + 1
      }
    }
    onInstant(at)
  }
}
