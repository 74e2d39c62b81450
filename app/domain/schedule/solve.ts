/**
 * Looks for places for bakes: serial schedule generation by priority rules, then with orders that are shaken at random
 * and kept when they are no worse; small problems are searched through. The same seed gives the same schedule.
 */
import type { ScheduleObjective } from '../planning.ts'
import { searchThrough } from './exact.ts'
import { lowerBound } from './lower-bound.ts'
import { figureOf } from './objectives.ts'
import type { Placement, ScheduleProblem } from './problem.ts'
import { type Compiled, callIns, compile, type SearchJob, SearchState } from './search-state.ts'

/** Up to so many bakes are searched through. */
const SMALL = 7
/** Nodes of that search; it is left where it would take longer. */
const NODES = 60_000

export interface SolveOptions {
  seed: number
  /** Schedules that are built and compared. */
  budget: number
}

export interface Progress {
  /** Share of the search done, 0 to 1. */
  share: number
  /** Figure of the best schedule so far; null while no bake has a place. */
  best: number | null
}

export interface Solution {
  /** One for each bake of the problem. */
  placements: Placement[]
  objective: ScheduleObjective
  /** Figure of the objective; null when no bake has a place. */
  value: number | null
  bound: number
  boundWhy: string
  /** How far above the bound it is at most, as a share of the figure: 0 is proven best. */
  gap: number
  /** Bakes without a place. */
  unplaced: string[]
  built: number
}

interface Candidate {
  state: SearchState
  unplaced: number
  value: number
  /** Sum of all ends: of two that are alike the one that is sooner over. */
  ends: number
}

/**
 * Looks for a schedule step by step, so that the caller can tell how far it is, and stop.
 *
 * @param placed where bakes stand now: those under way and those pinned stay there
 */
export function* search(
  problem: ScheduleProblem,
  placed: readonly Placement[],
  objective: ScheduleObjective,
  { seed, budget }: SolveOptions,
): Generator<Progress, Solution> {
  const compiled = compile(problem)
  const fixed = fixedOf(compiled, placed)
  const free = compiled.jobs.filter((one) => !fixed.some((entry) => entry.one === one))
  const possible = free.filter(({ starts }) => starts.length > 0)
  const bound = lowerBound(compiled, objective, fixed, possible)
  const random = generator(seed)
  const build = (order: readonly Gene[]): Candidate => construct(compiled, fixed, order, objective)
  const orders = ruledOrders(possible)
  let bestOrder = orders[0] ?? []
  let best = build(bestOrder)
  let built = 1
  const consider = (order: Gene[]): void => {
    const candidate = build(order)
    built += 1
    if (compare(candidate, best) <= 0) {
      best = candidate
      bestOrder = order
    }
  }
  const reached = (): boolean => best.unplaced === 0 && best.value <= bound.value + 1e-9
  for (const order of orders) {
    consider(order)
    yield progress(best, 0)
    if (reached()) break
  }
  let proven = false
  if (!reached() && possible.length > 0 && possible.length <= SMALL) {
    const found = searchThrough(compiled, objective, fixed, possible, {
      best: best.unplaced === 0 ? best.value : Number.POSITIVE_INFINITY,
      stopAt: bound.value,
      nodes: NODES,
    })
    if (found.starts !== null) best = standAt(compiled, fixed, possible, found.starts, objective)
    proven = found.complete && best.unplaced === 0
  }
  while (!proven && !reached() && possible.length > 0 && built < budget) {
    consider(shaken(bestOrder, random))
    yield progress(best, built / budget)
  }
  return solution(
    problem,
    best,
    objective,
    built,
    proven ? { ...bound, value: Math.max(bound.value, best.value) } : bound,
  )
}

/** Looks for a schedule in one go; see `search`. */
export function solve(
  problem: ScheduleProblem,
  placed: readonly Placement[],
  objective: ScheduleObjective,
  options: SolveOptions & { onProgress?: (progress: Progress) => void; cancelled?: () => boolean },
): Solution | null {
  const steps = search(problem, placed, objective, options)
  for (;;) {
    const step = steps.next()
    if (step.done === true) return step.value
    options.onProgress?.(step.value)
    if (options.cancelled?.() === true) return null
  }
}

interface Fixed {
  one: SearchJob
  startH: number
  placement: Placement
}

function fixedOf(compiled: Compiled, placed: readonly Placement[]): Fixed[] {
  return placed.flatMap((placement): Fixed[] => {
    const one = compiled.jobs.find(({ job }) => job.id === placement.jobId)
    if (one === undefined || placement.startH === null) return []
    return one.job.underWay || placement.pinned ? [{ one, startH: placement.startH, placement }] : []
  })
}

function freshState(compiled: Compiled, fixed: readonly Fixed[]): SearchState {
  const state = new SearchState(compiled)
  for (const { one, startH, placement } of fixed) state.add(one, startH, placement)
  return state
}

/** A bake in the order of a construction, and how many places it lets pass. */
interface Gene {
  one: SearchJob
  skip: number
}

function construct(
  compiled: Compiled,
  fixed: readonly Fixed[],
  order: readonly Gene[],
  objective: ScheduleObjective,
): Candidate {
  const state = freshState(compiled, fixed)
  let unplaced = 0
  for (const { one, skip } of inSequence(order)) {
    const startH = choose(compiled, state, one, objective, skip)
    if (startH === null) unplaced += 1
    else state.add(one, startH)
  }
  return rated(compiled, state, unplaced, objective)
}

function rated(
  compiled: Compiled,
  state: SearchState,
  unplaced: number,
  objective: ScheduleObjective,
): Candidate {
  const ends = state.entries.reduce((sum, { one, startH }) => sum + startH + one.job.endH, 0)
  return { state, unplaced, value: figureOf(compiled, objective, state.entries), ends }
}

function standAt(
  compiled: Compiled,
  fixed: readonly Fixed[],
  jobs: readonly SearchJob[],
  starts: ReadonlyMap<number, number>,
  objective: ScheduleObjective,
): Candidate {
  const state = freshState(compiled, fixed)
  for (const one of jobs) state.add(one, starts.get(one.index) ?? 0)
  return rated(compiled, state, 0, objective)
}

/** The same order with every bake after those it waits for. */
function inSequence(order: readonly Gene[]): Gene[] {
  const left = [...order]
  const done: Gene[] = []
  while (left.length > 0) {
    const ready = left.findIndex(({ one }) =>
      left.every((other) => one.relation[other.one.index]?.after !== true),
    )
    // A ring of bakes that wait for each other has no first one; it is taken as it comes and will not fit.
    done.push(...left.splice(Math.max(0, ready), 1))
  }
  return done
}

/** The place for one bake that costs the objective least, the earliest of those that cost the same. */
function choose(
  compiled: Compiled,
  state: SearchState,
  one: SearchJob,
  objective: ScheduleObjective,
  skip: number,
): number | null {
  let left = skip
  let last: number | null = null
  for (const start of inOrderOf(compiled, state, one, objective)) {
    if (!state.fits(one, start)) continue
    if (left === 0) return start
    left -= 1
    last = start
  }
  return last
}

function inOrderOf(
  compiled: Compiled,
  state: SearchState,
  one: SearchJob,
  objective: ScheduleObjective,
): readonly number[] {
  if (objective === 'earliest-finish') return one.starts
  const cost = new Map<number, number>()
  if (objective === 'fewest-nights') {
    for (const start of one.starts) cost.set(start, callIns(compiled.calendar, one, start))
  } else {
    const heated = new Uint8Array(compiled.problem.hours)
    for (const { one: other, startH } of state.entries)
      heated.fill(1, Math.max(0, startH), Math.max(0, startH + other.heatH))
    const alone = new Int32Array(heated.length + 1)
    for (const [hour, on] of heated.entries()) alone[hour + 1] = (alone[hour] ?? 0) + (1 - on)
    for (const start of one.starts) {
      const until = Math.min(heated.length, start + one.heatH)
      cost.set(start, (alone[until] ?? 0) - (alone[start] ?? 0))
    }
  }
  return [...one.starts].sort((a, b) => (cost.get(a) ?? 0) - (cost.get(b) ?? 0) || a - b)
}

function compare(a: Candidate, b: Candidate): number {
  return a.unplaced - b.unplaced || difference(a.value, b.value) || a.ends - b.ends
}

function difference(a: number, b: number): number {
  return Math.abs(a - b) < 1e-9 ? 0 : a - b
}

/** Orders to begin with: the bakes that are hardest to place go first, by several measures of hardness. */
function ruledOrders(jobs: readonly SearchJob[]): Gene[][] {
  const peak = (one: SearchJob): number => Math.max(0, ...one.job.powerKW)
  const neighbours = (one: SearchJob): number => one.relation.filter(({ near }) => near).length
  const rules: ((one: SearchJob) => number)[] = [
    (one) => -one.job.endH,
    (one) => -peak(one),
    (one) => one.starts.length,
    (one) => -neighbours(one),
    (one) => one.job.latestEndH ?? Number.MAX_SAFE_INTEGER,
    (one) => one.index,
  ]
  return rules.map((rule) =>
    [...jobs].sort((a, b) => rule(a) - rule(b) || a.index - b.index).map((one) => ({ one, skip: 0 })),
  )
}

/** A neighbour of an order: a bake moved, two exchanged, or one that lets a place pass; now and then a new deal. */
function shaken(order: readonly Gene[], random: () => number): Gene[] {
  const genes = order.map((gene) => ({ ...gene }))
  const pick = (): number => Math.floor(random() * genes.length)
  if (random() < 0.05) {
    for (let i = genes.length - 1; i > 0; i -= 1) exchange(genes, i, Math.floor(random() * (i + 1)))
    return genes.map(({ one }) => ({ one, skip: 0 }))
  }
  const turns = 1 + Math.floor(random() * 3)
  for (let turn = 0; turn < turns; turn += 1) {
    const kind = random()
    if (kind < 0.45) genes.splice(pick(), 0, ...genes.splice(pick(), 1))
    else if (kind < 0.8) exchange(genes, pick(), pick())
    else {
      const gene = genes[pick()]
      if (gene !== undefined) gene.skip = Math.floor(random() * 4)
    }
  }
  return genes
}

function exchange(genes: Gene[], i: number, j: number): void {
  const a = genes[i]
  const b = genes[j]
  if (a === undefined || b === undefined) return
  genes[i] = b
  genes[j] = a
}

function progress(best: Candidate, share: number): Progress {
  return { share, best: best.state.entries.length === 0 ? null : best.value }
}

function solution(
  problem: ScheduleProblem,
  best: Candidate,
  objective: ScheduleObjective,
  built: number,
  bound: { value: number; why: string },
): Solution {
  const standing = best.state.placements()
  const placements = problem.jobs.map(
    (job): Placement =>
      standing.find(({ jobId }) => jobId === job.id) ?? {
        jobId: job.id,
        startH: null,
        supply: job.supply,
        cart: job.cart,
        pinned: false,
      },
  )
  const unplaced = placements.flatMap(({ jobId, startH }) => (startH === null ? [jobId] : []))
  const planned = placements.some(({ startH }) => startH !== null)
  const { value } = best
  return {
    placements,
    objective,
    value: planned ? value : null,
    bound: bound.value,
    boundWhy: bound.why,
    gap: value > 0 ? Math.max(0, (value - bound.value) / value) : 0,
    unplaced,
    built,
  }
}

/** Numbers from 0 to 1 by a seed; a 32-bit mixer in the manner of splitmix (from memory, not verified; only its spread matters). */
function generator(seed: number): () => number {
  let state = seed >>> 0
  return () => {
    state = (state + 0x9e3779b9) >>> 0
    let mixed = state
    mixed = Math.imul(mixed ^ (mixed >>> 16), 0x21f0aaad)
    mixed = Math.imul(mixed ^ (mixed >>> 15), 0x735a2d97)
    return ((mixed ^ (mixed >>> 15)) >>> 0) / 4_294_967_296
  }
}
