/**
 * What no schedule can be better than: from the energy that the caps let through, from the sets that there are, from
 * bakes that can never be hot together, and from the longest chain of bakes that wait for each other.
 */
import type { ScheduleObjective } from '../planning.ts'
import { FEEDERS } from '../register.ts'
import { figureOf } from './objectives.ts'
import { energyKWh } from './problem.ts'
import { type Compiled, callIns, type SearchJob } from './search-state.ts'

export interface LowerBound {
  value: number
  /** What it comes from, in words. */
  why: string
}

interface Timed {
  one: SearchJob
  startH: number
}

/**
 * The bound for placing `free` bakes beside those that stay where they are.
 *
 * @param fixed bakes under way and pinned ones
 */
export function lowerBound(
  compiled: Compiled,
  objective: ScheduleObjective,
  fixed: readonly Timed[],
  free: readonly SearchJob[],
): LowerBound {
  const placed = { value: figureOf(compiled, objective, fixed), why: 'the bakes that stay where they are' }
  if (free.length === 0) return placed
  const bounds =
    objective === 'earliest-finish'
      ? finishBounds(compiled, fixed, free)
      : [
          objective === 'fewest-nights'
            ? callInBound(compiled, placed.value, free)
            : energyBound(compiled, placed.value, fixed, free),
        ]
  return bounds.reduce((best, one) => (one.value > best.value ? one : best), placed)
}

function callInBound(compiled: Compiled, fixed: number, free: readonly SearchJob[]): LowerBound {
  const least = free.reduce(
    (sum, one) => sum + Math.min(...one.starts.map((start) => callIns(compiled.calendar, one, start))),
    0,
  )
  return { value: fixed + least, why: 'the fewest call-ins of each bake alone' }
}

function energyBound(
  compiled: Compiled,
  fixedValue: number,
  fixed: readonly Timed[],
  free: readonly SearchJob[],
): LowerBound {
  const { baseKW } = compiled.problem.rules
  const heat = free.reduce((sum, one) => sum + energyKWh(one.job), 0)
  const most = Math.max(...compiled.calendar.capKW) - baseKW
  const all = [...fixed.map(({ one }) => one), ...free]
  // Some hour is heated for each hour of the longest bake, and for each share of the cap that the heat fills.
  const longest = Math.max(...free.map((one) => one.heatH))
  const held = all.filter(({ job }) => !job.underWay).reduce((sum, one) => sum + one.heatH, 0)
  const sets = Math.max(1, compiled.problem.supplies.length)
  const heated = Math.max(longest, heat / most, held / sets)
  const fixedHeat = fixed.reduce((sum, { one }) => sum + (one.job.underWay ? 0 : energyKWh(one.job)), 0)
  return {
    value: Math.max(fixedValue + heat, fixedHeat + heat + baseKW * heated),
    why: 'heat of the bakes, and base load for as long as the caps and the supply sets make it last',
  }
}

function finishBounds(compiled: Compiled, fixed: readonly Timed[], free: readonly SearchJob[]): LowerBound[] {
  const first = Math.min(...free.map((one) => one.starts[0] ?? 0))
  const restAfterHeat = Math.min(...free.map((one) => one.job.endH - one.heatH))
  return [
    { value: longestChain(compiled, free), why: 'the longest chain of bakes that wait for each other' },
    { value: energyFinish(compiled, fixed, free, first) + restAfterHeat, why: 'energy under the caps' },
    setsFinish(compiled, free, 'supply', first),
    setsFinish(compiled, free, 'cart', first),
    { value: neverTogether(compiled, free, first), why: 'bakes that can never be hot at the same time' },
  ]
}

/** Each bake after those it waits for, each at the first start that its calendar allows. */
function longestChain(compiled: Compiled, free: readonly SearchJob[]): number {
  const known = new Map<number, number>()
  const endOf = (one: SearchJob, above: readonly number[]): number => {
    const found = known.get(one.index)
    if (found !== undefined) return found
    const waits = free.filter(
      (other) => one.relation[other.index]?.after === true && !above.includes(other.index),
    )
    const ready = Math.max(0, ...waits.map((other) => endOf(other, [...above, one.index])))
    const start = one.starts.find((hour) => hour - one.job.prepHours >= ready) ?? compiled.problem.hours
    const end = start + one.job.endH
    known.set(one.index, end)
    return end
  }
  return Math.max(...free.map((one) => endOf(one, [])))
}

/** First hour by which the caps have let all the heat through; of the site and of each feeder. */
function energyFinish(
  compiled: Compiled,
  fixed: readonly Timed[],
  free: readonly SearchJob[],
  first: number,
): number {
  const { capKW } = compiled.calendar
  const { baseKW, feederKW } = compiled.problem.rules
  const fixedAt = (hour: number, share: (one: SearchJob) => number): number =>
    fixed.reduce((sum, { one, startH }) => sum + (one.job.powerKW[hour - startH] ?? 0) * share(one), 0)
  const through = (
    heat: number,
    cap: (hour: number) => number,
    share: (one: SearchJob) => number,
  ): number => {
    let left = heat
    for (let hour = first; hour < compiled.problem.hours; hour += 1) {
      if (left <= 0) return hour
      left -= Math.max(0, cap(hour) - fixedAt(hour, share))
    }
    return compiled.problem.hours
  }
  const heatOf = (share: (one: SearchJob) => number): number =>
    free.reduce((sum, one) => sum + energyKWh(one.job) * share(one), 0)
  const ends = [
    through(
      heatOf(() => 1),
      (hour) => (capKW[hour] ?? 0) - baseKW,
      () => 1,
    ),
  ]
  for (const feeder of FEEDERS) {
    const limit = feederKW[feeder]
    const share = (one: SearchJob): number => one.job.feederShare[feeder]
    if (limit !== null && heatOf(share) > 0) ends.push(through(heatOf(share), () => limit, share))
  }
  return Math.max(...ends)
}

/**
 * With k sets, one of them has to serve at least n/k of n bakes one after another; taken over the longest ones only, the
 * shortest of those still have to fit.
 */
function setsFinish(
  compiled: Compiled,
  free: readonly SearchJob[],
  what: 'supply' | 'cart',
  first: number,
): LowerBound {
  const { supplies, carts, rules } = compiled.problem
  const count = what === 'supply' ? supplies.length : carts.length
  const why = what === 'supply' ? 'the number of supply sets' : 'the number of carts'
  if (count === 0) return { value: 0, why }
  const held = (one: SearchJob): number => rules.setupHours + (what === 'supply' ? one.heatH : one.job.coldH)
  const byLength = [...free].sort((a, b) => held(b) - held(a))
  // The way to the first bake may lie before its first start, and after the last set is free a test still runs.
  const rest = Math.min(...free.map((one) => one.job.endH + rules.setupHours - held(one)))
  let best = 0
  for (let n = 1; n <= byLength.length; n += 1) {
    const each = Math.ceil(n / count)
    const shortest = byLength.slice(n - each, n).reduce((sum, one) => sum + held(one), 0)
    best = Math.max(best, shortest)
  }
  const area = byLength.reduce((sum, one) => sum + held(one), 0) / count
  return { value: first - rules.setupHours + Math.max(best, area) + rest, why }
}

/** The heaviest set of bakes of which no two may be heated at once: they follow each other. */
function neverTogether(compiled: Compiled, free: readonly SearchJob[], first: number): number {
  const most = Math.max(...compiled.calendar.capKW)
  const least = free.map(({ job }) => (job.powerKW.length === 0 ? 0 : Math.min(...job.powerKW)))
  const apart = free.map((a, i) =>
    free.map((b, j) => i !== j && excludes(compiled, a, b, (least[i] ?? 0) + (least[j] ?? 0), most)),
  )
  const weight = free.map((one) => Math.min(one.heatH, one.job.powerKW.length))
  const rest = Math.min(...free.map((one, i) => one.job.endH - (weight[i] ?? 0)))
  let best = 0
  let budget = 20_000
  const grow = (from: number, chosen: readonly number[], sum: number): void => {
    best = Math.max(best, sum)
    budget -= 1
    if (budget < 0) return
    for (let i = from; i < free.length; i += 1) {
      if (chosen.every((j) => apart[i]?.[j] === true)) grow(i + 1, [...chosen, i], sum + (weight[i] ?? 0))
    }
  }
  grow(0, [], 0)
  return first + best + rest
}

function excludes(compiled: Compiled, a: SearchJob, b: SearchJob, leastKW: number, most: number): boolean {
  const { baseKW, feederKW } = compiled.problem.rules
  if (a.relation[b.index]?.touching === true) return true
  if (leastKW + baseKW > most + 1e-9) return true
  return FEEDERS.some((feeder) => {
    const limit = feederKW[feeder]
    return (
      limit !== null &&
      a.job.feederShare[feeder] === 1 &&
      b.job.feederShare[feeder] === 1 &&
      leastKW > limit + 1e-9
    )
  })
}
