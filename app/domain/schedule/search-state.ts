/** Bakes placed so far in a search, kept so that the next place can be judged quickly. */
import { FEEDERS, type Feeder } from '../register.ts'
import { type Calendar, calendarOf, QUARTERS } from './calendar.ts'
import {
  canFeed,
  distanceM,
  heatEndH,
  type Placement,
  type ScheduleJob,
  type ScheduleProblem,
} from './problem.ts'
import { momentsOf } from './violations.ts'

const KW_ROUNDING = 1e-9

/** What a search keeps of a bake. */
export interface SearchJob {
  index: number
  job: ScheduleJob
  heatH: number
  /** Starts that nothing but other bakes can forbid, in order of time. */
  starts: readonly number[]
  moments: readonly number[]
  /** For each other bake: whether both touch, are within the exclusion, or follow each other. */
  relation: readonly Relation[]
}

interface Relation {
  touching: boolean
  near: boolean
  /** The other has to be over before this one is prepared. */
  after: boolean
}

/** Everything that a search computes once. */
export interface Compiled {
  problem: ScheduleProblem
  calendar: Calendar
  jobs: readonly SearchJob[]
}

/** Computes what does not change during a search. */
export function compile(problem: ScheduleProblem): Compiled {
  const calendar = calendarOf(problem)
  const jobs = problem.jobs.map((job, index): SearchJob => {
    const relation = problem.jobs.map((other) => {
      const distance = other === job ? Number.POSITIVE_INFINITY : distanceM(job, other)
      return {
        touching: distance === 0,
        near: distance < problem.rules.exclusionM,
        after: job.requires.includes(other.id),
      }
    })
    return {
      index,
      job,
      heatH: heatEndH(job),
      starts: job.underWay ? [] : startsOf(problem, calendar, job),
      moments: momentsOf(job).map(({ atH }) => atH),
      relation,
    }
  })
  return { problem, calendar, jobs }
}

/** Starts at which a bake alone breaks nothing. */
function startsOf(problem: ScheduleProblem, calendar: Calendar, job: ScheduleJob): number[] {
  const starts: number[] = []
  const first = Math.max(0, Math.ceil(job.prepHours), Math.ceil(job.earliestH))
  const last = Math.min(problem.hours, job.latestEndH ?? problem.hours) - job.endH
  const step = problem.stepHours
  for (let start = Math.ceil(first / step) * step; start <= last; start += step) {
    if (aloneFits(problem, calendar, job, start)) starts.push(start)
  }
  return starts
}

function aloneFits(problem: ScheduleProblem, calendar: Calendar, job: ScheduleJob, start: number): boolean {
  if (calendar.beforeHoliday[start] === 1) return false
  for (const { atH } of momentsOf(job)) {
    const at = start + atH
    if (at >= problem.hours) continue
    if (calendar.changeDay[Math.floor(at)] === 1) return false
    if (crewsIn(calendar, at) < 1) return false
  }
  const rampEnd = Math.min(calendar.uncovered.length - 1, Math.ceil((start + job.rampEndH) * QUARTERS))
  if ((calendar.uncovered[rampEnd] ?? 0) > (calendar.uncovered[start * QUARTERS] ?? 0)) return false
  return job.powerKW.every((kw, i) => {
    const feeder = FEEDERS.every((one) => kw * job.feederShare[one] <= feederCap(problem, one) + KW_ROUNDING)
    const site = kw === 0 || kw + problem.rules.baseKW <= (calendar.capKW[start + i] ?? 0) + KW_ROUNDING
    return feeder && site
  })
}

function feederCap(problem: ScheduleProblem, feeder: Feeder): number {
  return problem.rules.feederKW[feeder] ?? Number.POSITIVE_INFINITY
}

function crewsIn(calendar: Calendar, atH: number): number {
  const quarter = Math.floor(atH * QUARTERS)
  return (calendar.atWork[quarter] ?? 0) + (calendar.onCall[quarter] ?? 0)
}

/** How often the pair on call has to come in for a bake. */
export function callIns(calendar: Calendar, one: SearchJob, startH: number): number {
  let count = 0
  for (const moment of one.moments) {
    const quarter = Math.floor((startH + moment) * QUARTERS)
    if (quarter >= 0 && quarter < calendar.atWork.length && calendar.atWork[quarter] === 0) count += 1
  }
  return count
}

interface Entry {
  one: SearchJob
  startH: number
  /** Of a bake that stays where it is: its set and cart stay with it. */
  given: Placement | null
}

/** A schedule in the making. Bakes can be added where they fit and taken out again. */
export class SearchState {
  readonly entries: Entry[] = []
  private readonly site: Float64Array
  private readonly feeders: Record<Feeder, Float64Array>
  /** Sets and carts in use at each hour. */
  private readonly held: Record<'supply' | 'cart', Int16Array>
  private readonly compiled: Compiled

  constructor(compiled: Compiled) {
    this.compiled = compiled
    const { hours } = compiled.problem
    this.site = new Float64Array(hours)
    this.feeders = { west: new Float64Array(hours), east: new Float64Array(hours) }
    this.held = { supply: new Int16Array(hours), cart: new Int16Array(hours) }
  }

  /** Adds a bake without asking whether it fits. */
  add(one: SearchJob, startH: number, given: Placement | null = null): void {
    this.entries.push({ one, startH, given })
    this.load(one, startH, 1)
  }

  /** Takes out the bake that was added last. */
  removeLast(): void {
    const last = this.entries.pop()
    if (last !== undefined) this.load(last.one, last.startH, -1)
  }

  private load(one: SearchJob, startH: number, sign: 1 | -1): void {
    const { site, feeders } = this
    const { job } = one
    const from = Math.max(0, -startH)
    const until = Math.min(job.powerKW.length, site.length - startH)
    for (let i = from; i < until; i += 1) {
      const kw = sign * (job.powerKW[i] ?? 0)
      site[startH + i] = (site[startH + i] ?? 0) + kw
      for (const feeder of FEEDERS)
        feeders[feeder][startH + i] = (feeders[feeder][startH + i] ?? 0) + kw * job.feederShare[feeder]
    }
    for (const what of ['supply', 'cart'] as const) {
      const held = this.held[what]
      const [first, last] = this.heldHours(one, startH, what)
      for (let hour = first; hour < last; hour += 1) held[hour] = (held[hour] ?? 0) + sign
    }
  }

  /** Hours of the window in which a bake holds its set or cart for the whole hour or a part of it. */
  private heldHours(one: SearchJob, startH: number, what: 'supply' | 'cart'): [number, number] {
    const { setupHours } = this.compiled.problem.rules
    const until = startH + (what === 'supply' ? one.heatH : one.job.coldH)
    return [Math.max(0, Math.floor(startH - setupHours)), Math.min(this.site.length, Math.ceil(until))]
  }

  private enoughHeld(one: SearchJob, startH: number, what: 'supply' | 'cart'): boolean {
    const { problem } = this.compiled
    const count = what === 'supply' ? problem.supplies.length : problem.carts.length
    const held = this.held[what]
    const [first, last] = this.heldHours(one, startH, what)
    // The first and last hour may be shared by two that follow each other within it.
    for (let hour = first + 1; hour < last - 1; hour += 1) if ((held[hour] ?? 0) >= count) return false
    return true
  }

  /** Whether a bake can start at an hour out of its own `starts`, beside those that are there. */
  fits(one: SearchJob, startH: number): boolean {
    return (
      this.placeFree(one, startH) &&
      this.enoughHeld(one, startH, 'supply') &&
      this.enoughHeld(one, startH, 'cart') &&
      this.powerFree(one, startH) &&
      this.crewFree(one, startH) &&
      this.equip([...this.entries, { one, startH, given: null }], 'supply') !== null &&
      this.equip([...this.entries, { one, startH, given: null }], 'cart') !== null
    )
  }

  private powerFree({ job }: SearchJob, startH: number): boolean {
    const { capKW } = this.compiled.calendar
    const { baseKW } = this.compiled.problem.rules
    const { site, feeders } = this
    const west = feederCap(this.compiled.problem, 'west')
    const east = feederCap(this.compiled.problem, 'east')
    const { powerKW, feederShare } = job
    for (let i = 0; i < powerKW.length; i += 1) {
      const kw = powerKW[i] ?? 0
      if (kw === 0) continue
      const hour = startH + i
      if ((site[hour] ?? 0) + kw + baseKW > (capKW[hour] ?? 0) + KW_ROUNDING) return false
      if ((feeders.west[hour] ?? 0) + kw * feederShare.west > west + KW_ROUNDING) return false
      if ((feeders.east[hour] ?? 0) + kw * feederShare.east > east + KW_ROUNDING) return false
    }
    return true
  }

  private crewFree(one: SearchJob, startH: number): boolean {
    const { calendar, problem } = this.compiled
    const { attendHours } = problem.rules
    const all: number[] = []
    for (const entry of [...this.entries, { one, startH }]) {
      for (const moment of entry.one.moments) {
        const at = entry.startH + moment
        if (at >= 0 && at < problem.hours) all.push(at)
      }
    }
    // Only instants that the new bake touches can have become too many.
    return all.every((at) => {
      const touched = one.moments.some((moment) => Math.abs(startH + moment - at) < attendHours)
      if (!touched) return true
      const busy = all.filter((other) => other <= at && at < other + attendHours).length
      return busy <= crewsIn(calendar, at)
    })
  }

  private placeFree(one: SearchJob, startH: number): boolean {
    const { job } = one
    for (const { one: other, startH: otherH } of this.entries) {
      const relation = one.relation[other.index]
      if (relation === undefined) continue
      const hotUntil = startH + job.coldH
      const otherUntil = otherH + other.job.coldH
      if (relation.touching && startH < otherUntil && otherH < hotUntil) return false
      if (relation.near) {
        if (job.prepHours > 0 && startH - job.prepHours < otherUntil && otherH < startH) return false
        if (
          other.job.prepHours > 0 &&
          !other.job.underWay &&
          otherH - other.job.prepHours < hotUntil &&
          startH < otherH
        )
          return false
      }
      if (relation.after && startH - job.prepHours < otherH + other.job.endH) return false
      if (other.relation[one.index]?.after && otherH - other.job.prepHours < startH + job.endH) return false
    }
    return true
  }

  /**
   * Sets or carts for bakes, in the order of entries; null when there are not enough. Tries by time and goes back where
   * a bake that must have one set finds it taken.
   */
  private equip(entries: readonly Entry[], what: 'supply' | 'cart'): string[] | null {
    const { problem } = this.compiled
    const tags = what === 'supply' ? problem.supplies.map(({ tag }) => tag) : [...problem.carts]
    const order = entries
      .map((_, i) => i)
      .sort((a, b) => (entries[a]?.startH ?? 0) - (entries[b]?.startH ?? 0))
    const held = (i: number): [number, number] => {
      const { one, startH } = entries[i] as Entry
      return [startH - problem.rules.setupHours, startH + (what === 'supply' ? one.heatH : one.job.coldH)]
    }
    // Those that cannot be moved are known from the start, so that nobody takes their set before them.
    const taken = new Map<string, [number, number][]>(tags.map((tag) => [tag, []]))
    const found: (string | null)[] = entries.map(() => null)
    const open: number[] = []
    for (const i of order) {
      const fixed = (entries[i] as Entry).given?.[what] ?? null
      if (fixed === null) open.push(i)
      else {
        found[i] = fixed
        taken.get(fixed)?.push(held(i))
      }
    }
    let budget = 2000
    const place = (k: number): boolean => {
      const i = open[k]
      if (i === undefined) return true
      budget -= 1
      if (budget < 0) return false
      const { job } = (entries[i] as Entry).one
      const [from, until] = held(i)
      const tried = new Set<string>()
      for (const tag of tags) {
        if (!this.able(job, tag, what)) continue
        const spans = taken.get(tag) ?? []
        if (spans.some(([a, b]) => a < until && from < b)) continue
        // Two sets that are alike and free alike are one choice.
        const likeness = this.likeness(tag, what, spans, from)
        if (tried.has(likeness)) continue
        tried.add(likeness)
        spans.push([from, until])
        found[i] = tag
        if (place(k + 1)) return true
        spans.pop()
        found[i] = null
      }
      return false
    }
    return place(0) ? found.map((tag) => tag ?? '') : null
  }

  private able(job: ScheduleJob, tag: string, what: 'supply' | 'cart'): boolean {
    if (what === 'cart') return job.cart === null || job.cart === tag
    const supply = this.compiled.problem.supplies.find((one) => one.tag === tag)
    return supply !== undefined && canFeed(supply, job)
  }

  private likeness(
    tag: string,
    what: 'supply' | 'cart',
    spans: readonly (readonly [number, number])[],
    from: number,
  ): string {
    const asked = this.entries.some(({ one }) => one.job[what] === tag) ? tag : ''
    const later = spans.filter(([, until]) => until > from).map(([a, b]) => `${a}-${b}`)
    const supply = this.compiled.problem.supplies.find((one) => one.tag === tag)
    const able = what === 'supply' ? `${supply?.maxAmps}/${supply?.maxVolts}` : ''
    return `${asked}|${able}|${later.sort().join()}`
  }

  /** The placements of what is there, with set and cart for each. */
  placements(): Placement[] {
    const supplies = this.equip(this.entries, 'supply')
    const carts = this.equip(this.entries, 'cart')
    return this.entries.map(({ one, startH, given }, i) => ({
      jobId: one.job.id,
      startH,
      // Pinned bakes may stand so that there are not sets enough; then each keeps what it had.
      supply: supplies?.[i] ?? given?.supply ?? one.job.supply,
      cart: carts?.[i] ?? given?.cart ?? one.job.cart,
      pinned: given?.pinned ?? false,
    }))
  }
}
