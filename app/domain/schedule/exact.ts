/** Goes through all schedules of a few bakes, leaving out whatever cannot become better than what is known. */
import type { ScheduleObjective } from '../planning.ts'
import { figureOf } from './objectives.ts'
import { energyKWh, type Placement } from './problem.ts'
import { type Compiled, callIns, type SearchJob, SearchState } from './search-state.ts'

interface Fixed {
  one: SearchJob
  startH: number
  placement: Placement
}

export interface Exact {
  /** Starts by index of the bake, where something better than `best` was found. */
  starts: Map<number, number> | null
  /** Whether nothing was left out for want of time. */
  complete: boolean
}

/**
 * Branches over the bakes in the order in which they start.
 *
 * @param limits figure to beat, figure that cannot be beaten, and nodes after which it is left
 */
export function searchThrough(
  compiled: Compiled,
  objective: ScheduleObjective,
  fixed: readonly Fixed[],
  jobs: readonly SearchJob[],
  limits: { best: number; stopAt: number; nodes: number },
): Exact {
  const state = new SearchState(compiled)
  for (const { one, startH, placement } of fixed) state.add(one, startH, placement)
  let { best } = limits
  let nodes = limits.nodes
  let starts: Map<number, number> | null = null
  const leastOf = new Map(jobs.map((one) => [one.index, leastShare(compiled, objective, one)] as const))

  /** What the rest adds at least, or reaches at least, when none of it starts before an hour. */
  const reachable = (left: readonly SearchJob[], fromH: number): number => {
    const now = figureOf(compiled, objective, state.entries)
    if (objective !== 'earliest-finish')
      return left.reduce((sum, one) => sum + (leastOf.get(one.index) ?? 0), now)
    return left.reduce((last, one) => {
      const first = one.starts[firstFrom(one.starts, fromH)]
      return first === undefined ? Number.POSITIVE_INFINITY : Math.max(last, first + one.job.endH)
    }, now)
  }

  const descend = (left: readonly SearchJob[], fromH: number, fromIndex: number): void => {
    if (left.length === 0) {
      const value = figureOf(compiled, objective, state.entries)
      if (value < best - 1e-9) {
        best = value
        starts = new Map(state.entries.map(({ one, startH }) => [one.index, startH]))
      }
      return
    }
    for (const one of left) {
      const rest = left.filter((other) => other !== one)
      for (let k = firstFrom(one.starts, fromH); k < one.starts.length; k += 1) {
        const start = one.starts[k] as number
        // Two that start in the same hour are one case, not two.
        if (start === fromH && one.index < fromIndex) continue
        if (nodes <= 0 || best <= limits.stopAt + 1e-9) return
        nodes -= 1
        if (objective === 'earliest-finish' && start + one.job.endH >= best - 1e-9) break
        if (!state.fits(one, start)) continue
        state.add(one, start)
        const bound = reachable(rest, start)
        if (bound < best - 1e-9) descend(rest, start, one.index)
        state.removeLast()
        // Later starts of this one leave the rest no more room.
        if (objective === 'earliest-finish' && bound >= best - 1e-9) break
      }
    }
  }
  descend(jobs, 0, -1)
  return { starts, complete: nodes > 0 }
}

function leastShare(compiled: Compiled, objective: ScheduleObjective, one: SearchJob): number {
  if (objective === 'least-energy') return energyKWh(one.job)
  return Math.min(...one.starts.map((start) => callIns(compiled.calendar, one, start)))
}

/** Index of the first start at or after an hour. */
function firstFrom(starts: readonly number[], hour: number): number {
  let low = 0
  let high = starts.length
  while (low < high) {
    const middle = (low + high) >> 1
    if ((starts[middle] ?? 0) < hour) low = middle + 1
    else high = middle
  }
  return low
}
