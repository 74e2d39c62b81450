/**
 * Walks through a schedule and says what breaks, when and by how much. It shares nothing with the search: what the
 * search proposes is judged here, and so is what a person drags about.
 */
import { FEEDERS, type Feeder } from '../register.ts'
import { calendarOf, QUARTERS } from './calendar.ts'
import { missingCaps } from './caps.ts'
import {
  canFeed,
  distanceM,
  heatEndH,
  type Placed,
  type Placement,
  type ScheduleJob,
  type ScheduleProblem,
} from './problem.ts'
import { hourWords, kwWords, spanWords } from './words.ts'

/** `breaks` cannot stay; `missing` has to be done before that bake; a `note` is to be known. */
export type Severity = 'breaks' | 'missing' | 'note'

export type ViolationKind =
  | 'window'
  | 'power'
  | 'feeder'
  | 'supply'
  | 'cart'
  | 'crew'
  | 'holiday'
  | 'clock-change'
  | 'neighbour'
  | 'order'
  | 'permit'
  | 'steps'

export interface Violation {
  severity: Severity
  kind: ViolationKind
  /** Bakes that have a part in it. */
  jobs: string[]
  fromH: number
  untilH: number
  text: string
}

/** Rounding of summed kilowatts is no overload. */
const KW_ROUNDING = 1e-6

interface Standing extends Placed {
  placement: Placement
}

/**
 * Everything that is wrong with a schedule, and what is to be known of it. Bakes without a start are left out.
 *
 * @throws RangeError for a placement of a bake that the problem does not have, or a start between two hours
 */
export function violations(problem: ScheduleProblem, placements: readonly Placement[]): Violation[] {
  const standing = stand(problem, placements)
  return [
    ...standing.flatMap((one) => (one.job.underWay ? [] : ownFaults(problem, one))),
    ...capFaults(problem, standing),
    ...powerFaults(problem, standing),
    ...equipmentFaults(problem, standing, 'supply'),
    ...equipmentFaults(problem, standing, 'cart'),
    ...crewFaults(problem, standing),
    ...pairs(standing).flatMap(([a, b]) => [
      ...neighbourFaults(problem, a, b),
      ...orderFaults(problem, a, b),
    ]),
  ]
}

function stand(problem: ScheduleProblem, placements: readonly Placement[]): Standing[] {
  return placements.flatMap((placement) => {
    const { jobId, startH } = placement
    const job = problem.jobs.find(({ id }) => id === jobId)
    if (job === undefined) throw new RangeError(`no bake ${jobId} to place`)
    if (startH === null) return []
    if (!Number.isInteger(startH)) throw new RangeError(`a bake starts at a full hour, not at ${startH}`)
    return [{ job, startH, placement }]
  })
}

function pairs(standing: readonly Standing[]): [Standing, Standing][] {
  return standing.flatMap((a, i) => standing.slice(i + 1).map((b): [Standing, Standing] => [a, b]))
}

/** Instants at which a pair has to be there, hours from the start. */
export function momentsOf(job: ScheduleJob): { atH: number; what: string }[] {
  return [
    { atH: 0, what: 'first energising' },
    { atH: job.rampEndH, what: 'end of ramp' },
    { atH: job.soakEndH, what: 'end of soak' },
  ]
}

function ownFaults(problem: ScheduleProblem, { job, startH }: Standing): Violation[] {
  const faults: Violation[] = []
  const say = (severity: Severity, kind: ViolationKind, fromH: number, untilH: number, text: string) =>
    faults.push({ severity, kind, jobs: [job.id], fromH, untilH, text })
  const prepH = startH - job.prepHours
  const overH = startH + job.endH
  if (prepH < 0)
    say(
      'breaks',
      'window',
      prepH,
      0,
      `${job.label}: preparation would begin ${hourWords(problem, prepH)}, before the schedule does.`,
    )
  const latest = Math.min(problem.hours, job.latestEndH ?? problem.hours)
  if (overH > latest)
    say(
      'breaks',
      'window',
      latest,
      overH,
      `${job.label}: its test would be over ${hourWords(problem, overH)}, and it has to be over by ${hourWords(problem, latest)}.`,
    )
  if (startH < job.earliestH)
    say(
      'breaks',
      'permit',
      startH,
      job.earliestH,
      `${job.label}: heating not before ${hourWords(problem, job.earliestH)}, ${job.earliestWhy}.`,
    )
  faults.push(...dayFaults(problem, job, startH))
  for (const step of job.missing) say('missing', 'steps', prepH, startH, `${job.label}: ${step}`)
  if (job.permits > 1)
    say(
      'note',
      'permit',
      startH,
      startH + job.coldH,
      `${job.label} is hot for ${(job.coldH / 24).toFixed(1)} days: ${job.permits} permits, each taking over from the one before.`,
    )
  return faults
}

function dayFaults(problem: ScheduleProblem, job: ScheduleJob, startH: number): Violation[] {
  const calendar = calendarOf(problem)
  const faults: Violation[] = []
  const add = (severity: Severity, kind: ViolationKind, fromH: number, untilH: number, text: string) =>
    faults.push({ severity, kind, jobs: [job.id], fromH, untilH, text })
  if (calendar.beforeHoliday[startH] === 1)
    add(
      'breaks',
      'holiday',
      startH,
      startH + 1,
      `${job.label}: first energising ${hourWords(problem, startH)} is on a holiday or the day before one; nobody is there the day after if something fails.`,
    )
  for (const { atH, what } of momentsOf(job)) {
    if (calendar.changeDay[Math.floor(startH + atH)] === 1)
      add(
        'breaks',
        'clock-change',
        startH + atH,
        startH + atH,
        `${job.label}: ${what} ${hourWords(problem, startH + atH)} is on the day the clocks change; take another day.`,
      )
  }
  const ramp = [startH * QUARTERS, Math.ceil((startH + job.rampEndH) * QUARTERS)] as const
  const firstAlone = indexBetween(ramp[0], ramp[1], (q) => crewsAt(problem, q) === 0)
  if (firstAlone !== null)
    add(
      'breaks',
      'crew',
      firstAlone / QUARTERS,
      startH + job.rampEndH,
      `${job.label}: nobody at work or on call ${hourWords(problem, firstAlone / QUARTERS)}, during its ramp.`,
    )
  const holidays = holidaysIn(problem, startH, startH + job.coldH)
  if (holidays !== null)
    add(
      'note',
      'holiday',
      holidays,
      holidays + 24,
      `${job.label} is hot over a holiday from ${hourWords(problem, holidays)}: no crew to confirm its permit that day; name somebody.`,
    )
  return faults
}

function indexBetween(from: number, until: number, test: (index: number) => boolean): number | null {
  for (let i = Math.max(0, from); i < until; i += 1) if (test(i)) return i
  return null
}

function holidaysIn(problem: ScheduleProblem, fromH: number, untilH: number): number | null {
  const { holiday, hours } = calendarOf(problem)
  return indexBetween(fromH, Math.min(hours, Math.ceil(untilH)), (hour) => holiday[hour] === 1)
}

/** Crews of two at work or on call in a quarter of an hour; outside the window nobody asks for any. */
function crewsAt(problem: ScheduleProblem, quarter: number): number {
  const { atWork, onCall } = calendarOf(problem)
  return quarter < 0 || quarter >= atWork.length
    ? Number.POSITIVE_INFINITY
    : (atWork[quarter] ?? 0) + (onCall[quarter] ?? 0)
}

/** Heat of all bakes for each hour of the window, kW: of the site without its base load, and of each feeder. */
export function heatByHour(
  problem: ScheduleProblem,
  placed: readonly Placed[],
): { site: Float64Array; feeders: Record<Feeder, Float64Array> } {
  const site = new Float64Array(problem.hours)
  const feeders = { west: new Float64Array(problem.hours), east: new Float64Array(problem.hours) }
  for (const { job, startH } of placed) {
    for (const [i, kw] of job.powerKW.entries()) {
      const hour = startH + i
      if (hour < 0 || hour >= problem.hours) continue
      site[hour] = (site[hour] ?? 0) + kw
      for (const feeder of FEEDERS)
        feeders[feeder][hour] = (feeders[feeder][hour] ?? 0) + kw * job.feederShare[feeder]
    }
  }
  return { site, feeders }
}

/** A cap that nobody has set is no leave to heat. */
function capFaults(problem: ScheduleProblem, standing: readonly Standing[]): Violation[] {
  const planned = standing.filter(({ job }) => !job.underWay)
  if (planned.length === 0) return []
  const jobs = planned.map(({ job }) => job.id)
  return missingCaps(problem.rules).map((text) => ({
    severity: 'breaks',
    kind: 'power',
    jobs,
    fromH: 0,
    untilH: problem.hours,
    text,
  }))
}

function powerFaults(problem: ScheduleProblem, standing: readonly Standing[]): Violation[] {
  const { capKW, byDay } = calendarOf(problem)
  const { baseKW, feederKW, dayKW, nightKW } = problem.rules
  const { site, feeders } = heatByHour(problem, standing)
  const faults = overloads(problem, standing, 'power', (hour) => {
    const load = site[hour] ?? 0
    const name = byDay[hour] === 1 ? 'Site by day' : 'Site at night'
    const judged = (byDay[hour] === 1 ? dayKW : nightKW) !== null
    // With no bake on, the base load is not for this schedule to judge.
    return {
      load: judged && load > 0 ? load + baseKW : 0,
      limit: capKW[hour] ?? 0,
      name,
      more: `, with the base load of ${kwWords(baseKW)} kW`,
    }
  })
  for (const feeder of FEEDERS) {
    const limit = feederKW[feeder]
    if (limit === null) continue
    const share = standing.filter(({ job }) => job.feederShare[feeder] > 0)
    faults.push(
      ...overloads(problem, share, 'feeder', (hour) => ({
        load: feeders[feeder][hour] ?? 0,
        limit,
        name: `Feeder ${feeder}`,
        more: '',
      })),
    )
  }
  return faults
}

interface Load {
  load: number
  limit: number
  name: string
  more: string
}

/** Runs of hours above a limit, each with its worst figure. */
function overloads(
  problem: ScheduleProblem,
  standing: readonly Standing[],
  kind: 'power' | 'feeder',
  at: (hour: number) => Load,
): Violation[] {
  const faults: Violation[] = []
  let run = null as (Load & { fromH: number }) | null
  const close = (untilH: number): void => {
    if (run === null) return
    const { fromH, load, limit, name, more } = run
    const on = standing.filter(({ job, startH }) => startH < untilH && startH + job.powerKW.length > fromH)
    const labels = on.map(({ job }) => job.label).join(', ')
    const text = `${name} at ${kwWords(load)} of ${kwWords(limit)} kW, ${spanWords(problem, fromH, untilH)}${more}: ${labels}.`
    faults.push({ severity: 'breaks', kind, jobs: on.map(({ job }) => job.id), fromH, untilH, text })
    run = null
  }
  for (let hour = 0; hour < problem.hours; hour += 1) {
    const now = at(hour)
    const over = now.load > now.limit + KW_ROUNDING
    if (run !== null && (!over || run.name !== now.name)) close(hour)
    if (!over) continue
    if (run === null) run = { ...now, fromH: hour }
    else if (now.load > run.load) run = { ...run, load: now.load }
  }
  close(problem.hours)
  return faults
}

/** Hours during which a bake holds its supply set, or its cart. */
export function heldHours(
  problem: ScheduleProblem,
  { job, startH }: Placed,
  what: 'supply' | 'cart',
): [number, number] {
  return [startH - problem.rules.setupHours, startH + (what === 'supply' ? heatEndH(job) : job.coldH)]
}

function equipmentFaults(
  problem: ScheduleProblem,
  standing: readonly Standing[],
  what: 'supply' | 'cart',
): Violation[] {
  const name = what === 'supply' ? 'supply set' : 'cart'
  const faults = standing.flatMap(({ job, startH, placement }): Violation[] => {
    if (job.underWay) return []
    const fault = (text: string): Violation[] => [
      { severity: 'breaks', kind: what, jobs: [job.id], fromH: startH, untilH: startH + job.soakEndH, text },
    ]
    const tag = placement[what]
    if (tag === null) return fault(`${job.label} has no ${name} yet.`)
    if (job[what] !== null && job[what] !== tag)
      return fault(`${job.label} has ${tag}; its plan asks for ${job[what]}.`)
    if (what === 'cart')
      return problem.carts.includes(tag)
        ? []
        : fault(`${job.label} has the cart ${tag}, which is not in the register.`)
    const supply = problem.supplies.find((one) => one.tag === tag)
    if (supply === undefined)
      return fault(`${job.label} has the supply set ${tag}, which is not in the register.`)
    return canFeed(supply, job)
      ? []
      : fault(
          `${job.label} needs ${job.amps.toFixed(0)} A at ${job.volts.toFixed(1)} V; ${tag} gives ${supply.maxAmps} A at ${supply.maxVolts} V.`,
        )
  })
  for (const [a, b] of pairs(standing)) {
    const tag = a.placement[what]
    if (tag === null || tag !== b.placement[what] || (a.job.underWay && b.job.underWay)) continue
    const [fromA, untilA] = heldHours(problem, a, what)
    const [fromB, untilB] = heldHours(problem, b, what)
    const fromH = Math.max(fromA, fromB)
    const untilH = Math.min(untilA, untilB)
    if (fromH >= untilH) continue
    const text = `${tag} is wanted twice, ${spanWords(problem, fromH, untilH)}: ${a.job.label} and ${b.job.label}.`
    faults.push({ severity: 'breaks', kind: what, jobs: [a.job.id, b.job.id], fromH, untilH, text })
  }
  return faults
}

function crewFaults(problem: ScheduleProblem, standing: readonly Standing[]): Violation[] {
  const moments = standing
    .flatMap(({ job, startH }) => momentsOf(job).map(({ atH, what }) => ({ job, what, atH: startH + atH })))
    .filter(({ atH }) => atH >= 0 && atH < problem.hours)
  return moments.flatMap(({ job, what, atH }, index): Violation[] => {
    // Whoever has begun and not yet ended at this instant, the one that begins included.
    const busy = moments.filter((other) => other.atH <= atH && atH < other.atH + problem.rules.attendHours)
    const crews = crewsAt(problem, Math.floor(atH * QUARTERS))
    if (busy.length <= crews || busy.every((one) => one.job.underWay)) return []
    // Said once for several that begin together.
    if (moments.slice(index + 1).some((other) => other.atH === atH)) return []
    const others = busy.filter((one) => one.job !== job).map((one) => `${one.what} of ${one.job.label}`)
    const meanwhile = others.length === 0 ? '' : `, with ${others.join(' and ')} in the same hour`
    const text = `${job.label}: ${what} ${hourWords(problem, atH)} needs a crew of two; ${crewWords(crews)}${meanwhile}.`
    const jobs = [...new Set(busy.map((one) => one.job.id))]
    return [{ severity: 'breaks', kind: 'crew', jobs, fromH: atH, untilH: atH, text }]
  })
}

function crewWords(crews: number): string {
  if (crews === 0) return 'nobody is at work or on call then'
  return crews === 1 ? 'one crew is at work or on call then' : `${crews} crews are at work or on call then`
}

function neighbourFaults(problem: ScheduleProblem, a: Standing, b: Standing): Violation[] {
  if (a.job.underWay && b.job.underWay) return []
  const distance = distanceM(a.job, b.job)
  if (distance >= problem.rules.exclusionM) return []
  const faults: Violation[] = []
  const jobs = [a.job.id, b.job.id]
  const hot = (one: Standing): [number, number] => [one.startH, one.startH + one.job.coldH]
  if (distance === 0) {
    const both = overlap(hot(a), hot(b))
    if (both !== null)
      faults.push({
        severity: 'breaks',
        kind: 'neighbour',
        jobs,
        fromH: both[0],
        untilH: both[1],
        text: `${a.job.label} and ${b.job.label} share a valve box that would be hot on both sides, ${spanWords(problem, ...both)}. Bake them as a pair or one after the other.`,
      })
  }
  for (const [working, heated] of [
    [a, b],
    [b, a],
  ] as const) {
    if (working.job.underWay) continue
    const near = overlap([working.startH - working.job.prepHours, working.startH], hot(heated))
    if (near !== null)
      faults.push({
        severity: 'breaks',
        kind: 'neighbour',
        jobs,
        fromH: near[0],
        untilH: near[1],
        text: `${working.job.label} cannot be prepared within ${problem.rules.exclusionM} m of ${heated.job.label} while that is hot, ${spanWords(problem, ...near)}.`,
      })
  }
  return faults
}

function overlap(a: readonly [number, number], b: readonly [number, number]): [number, number] | null {
  const from = Math.max(a[0], b[0])
  const until = Math.min(a[1], b[1])
  return from < until ? [from, until] : null
}

function orderFaults(problem: ScheduleProblem, a: Standing, b: Standing): Violation[] {
  return [[a, b] as const, [b, a] as const].flatMap(([later, first]): Violation[] => {
    if (later.job.underWay || !later.job.requires.includes(first.job.id)) return []
    const overH = first.startH + first.job.endH
    const prepH = later.startH - later.job.prepHours
    if (prepH >= overH) return []
    const text = `${later.job.label} waits for ${first.job.label}, which is over ${hourWords(problem, overH)}; its preparation would begin ${hourWords(problem, prepH)}.`
    return [
      {
        severity: 'breaks',
        kind: 'order',
        jobs: [later.job.id, first.job.id],
        fromH: prepH,
        untilH: overH,
        text,
      },
    ]
  })
}
