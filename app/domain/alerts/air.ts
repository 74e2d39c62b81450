/** A21: oxygen. Told with the first bad reading; over only after good air for long enough and an officer's release. */
import { z } from 'zod'
import { judgeOxygen } from '../oxygen.ts'
import type { OxygenFacts } from './facts.ts'
import { type Case, type Change, EVALUABLE, figure, type Judge, notEvaluable } from './judge.ts'

const AirSchema = z.object({
  raisedMs: z.number().nullable(),
  /** Since when the readings have all been good enough, without a hole. */
  goodMs: z.number().nullable(),
  lastMs: z.number().nullable(),
  /** When they had been so for long enough. */
  provenMs: z.number().nullable(),
})

export function judgeAir(of: Case<OxygenFacts>): Judge {
  const { content, facts, memory } = of
  const limits = {
    low: figure(of, 'lowPercent'),
    high: figure(of, 'highPercent'),
    release: figure(of, 'releasePercent'),
    set: true,
  }
  const holdMs = 1000 * figure(of, 'releaseS')
  const readings = [...facts.readings].sort((a, b) => a.atMs - b.atMs)
  const releases = [...facts.releasesMs].sort((a, b) => a - b)
  const found = AirSchema.safeParse(memory)
  const m = found.success ? { ...found.data } : { raisedMs: null, goodMs: null, lastMs: null, provenMs: null }

  function change(on: boolean, atMs: number, sinceMs: number, percent: number | null, where: string): Change {
    const low = percent !== null && percent < limits.low
    const limit = low ? limits.low : limits.high
    return {
      part: 'air',
      on,
      atMs,
      sinceMs,
      priority: content.priority,
      value: percent,
      limit: on ? limit : limits.release,
      unit: '%',
      what: on
        ? `oxygen ${percent?.toFixed(1)} % ${where} (${low ? 'at least' : 'at most'} ${limit.toFixed(1)})`
        : 'oxygen good again and released',
      text: on
        ? `${percent?.toFixed(1)} % oxygen was read ${where}. ${low ? 'At least' : 'At most'} ${limit.toFixed(1)} % are asked for.`
        : `Readings of ${limits.release.toFixed(1)} % or more for ${holdMs / 60_000} minutes, and an officer has released it.`,
    }
  }

  /** Takes releases up to an instant: one counts that comes with good air proven before it, or already given then. */
  function settle(fromMs: number, beforeMs: number, changes: Change[]): void {
    const { raisedMs, provenMs } = m
    if (raisedMs === null || provenMs === null) return
    const release = releases.find((at) => at >= raisedMs)
    if (release === undefined) return
    const at = Math.max(release, provenMs, fromMs)
    if (at >= beforeMs) return
    changes.push(change(false, at, provenMs, null, ''))
    m.raisedMs = null
    m.provenMs = null
  }

  return {
    run(fromMs, untilMs) {
      const changes: Change[] = []
      let walked = fromMs
      for (const { atMs, percent, place, instrument } of readings) {
        if (atMs < fromMs || atMs >= untilMs) continue
        settle(walked, atMs, changes)
        walked = atMs
        const answer = judgeOxygen(percent, limits)
        const good = answer === 'good' && percent >= limits.release
        if (!good) m.goodMs = null
        else if (m.goodMs === null || m.lastMs === null || atMs - m.lastMs > holdMs) m.goodMs = atMs
        m.lastMs = atMs
        if (answer !== 'good') {
          m.provenMs = null
          if (m.raisedMs !== null) continue
          m.raisedMs = atMs
          changes.push(change(true, atMs, atMs, percent, `at ${place} with ${instrument}`))
        } else if (!good) m.provenMs = null
        else if (m.provenMs === null && m.goodMs !== null && atMs - m.goodMs >= holdMs) m.provenMs = atMs
      }
      settle(walked, untilMs, changes)
      return changes
    },
    verdict: () => (readings.length > 0 ? EVALUABLE : notEvaluable('No oxygen reading is known.')),
    memory: () => m,
  }
}
