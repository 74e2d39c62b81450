/**
 * Small seeded problems, a checker of its own and the best schedule by going through all of them. Nothing of the
 * product's search or rules is used here: zones, caps, crews and distances are worked out again from the problem's facts.
 */
import type { Placement, ScheduleJob, ScheduleProblem } from '#app/domain/schedule/problem.ts'
import { everPresent, job, manyCarts, problem, supplies, twoCrews } from './problems.ts'

function seeded(seed: number): () => number {
  let state = seed * 2_654_435_761 + 12_345
  return () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0
    return state / 4_294_967_296
  }
}

/** Up to six bakes, or fewer, on a grid of six hours over fourteen days from Monday 2026-11-09 06:00. */
export function smallProblem(seed: number, most = 6): ScheduleProblem {
  const random = seeded(seed)
  const between = (low: number, high: number): number => low + Math.floor(random() * (high - low + 1))
  for (let i = 0; i < 8; i += 1) random()
  const count = between(2, most)
  const places = [0, 1, 2, 3, 4, 5, 6, 7].sort(() => random() - 0.5)
  const jobs = Array.from({ length: count }, (_, i) => {
    const rampH = between(8, 14)
    const soakH = between(count > 4 ? 30 : 20, count > 4 ? 60 : 90)
    const soakKW = between(15, 80)
    const place = places[i] as number
    const east = place > 3
    return job(`J${i}`, {
      extents: [{ line: 'MAIN', fromM: place * 150, toM: place * 150 + 150 }],
      feederShare: { west: east ? 0 : 1, east: east ? 1 : 0 },
      prepHours: between(0, 2) * 6,
      powerKW: [
        ...Array.from({ length: rampH }, (_, k) => Math.round(soakKW * (0.3 + (1.0 * (k + 1)) / rampH))),
        ...Array.from({ length: soakH }, () => soakKW),
      ],
      rampEndH: rampH,
      soakEndH: rampH + soakH,
      coldH: rampH + soakH + 9,
      endH: rampH + soakH + 9 + between(0, 12),
      earliestH: between(0, 4) * 6,
      requires: i > 0 && random() < 0.15 ? [`J${i - 1}`] : [],
    })
  })
  return problem({
    jobs,
    stepHours: 6,
    supplies: supplies(between(2, 3)),
    carts: manyCarts(between(2, 4)),
    crews: random() < 0.5 ? twoCrews() : everPresent(between(1, 2)),
    holidays: random() < 0.3 ? ['2026-11-13'] : [],
    rules: {
      dayKW: between(110, 200),
      nightKW: between(150, 260),
      baseKW: 18,
      dayFromHour: 6,
      dayToHour: 22,
      feederKW: { west: 140, east: 120 },
      exclusionM: 10,
      setupHours: between(0, 1) * 4,
      attendHours: 1,
    },
  })
}

interface Put {
  job: ScheduleJob
  at: number
}

/** Crews there are in a quarter of an hour: the site is one hour ahead of UTC throughout November. */
function crewsAt(p: ScheduleProblem, atH: number): number {
  const wall = new Date(p.fromMs + Math.floor(atH * 4) * 900_000 + 3_600_000)
  if (p.holidays.includes(wall.toISOString().slice(0, 10))) return 0
  if (p.crews[0]?.roster.onCall === null) return p.crews.length
  const minute = wall.getUTCHours() * 60 + wall.getUTCMinutes()
  const weekday = wall.getUTCDay()
  return weekday >= 1 && weekday <= 5 && minute >= 405 && minute < 1140 ? 2 : 1
}

/** Whether a bake may stand where it is put, whatever the others do. */
function aloneRight(p: ScheduleProblem, { job: one, at }: Put): boolean {
  if (at < one.earliestH || at - one.prepHours < 0 || at + one.endH > p.hours) return false
  const date = (ms: number): string => new Date(ms + 3_600_000).toISOString().slice(0, 10)
  const startMs = p.fromMs + at * 3_600_000
  if (p.holidays.includes(date(startMs)) || p.holidays.includes(date(startMs + 86_400_000))) return false
  for (let quarter = at * 4; quarter < (at + one.rampEndH) * 4; quarter += 1)
    if (crewsAt(p, quarter / 4) === 0) return false
  return crewsAt(p, at + one.rampEndH) > 0 && crewsAt(p, at + one.soakEndH) > 0
}

/** Whether two bakes may stand beside each other as far as place and order go. */
function pairRight(p: ScheduleProblem, a: Put, b: Put): boolean {
  const meet = (f1: number, t1: number, f2: number, t2: number): boolean =>
    Math.max(f1, f2) < Math.min(t1, t2)
  const [ea] = a.job.extents
  const [eb] = b.job.extents
  if (ea !== undefined && eb !== undefined) {
    const apart = Math.max(ea.fromM - eb.toM, eb.fromM - ea.toM)
    if (apart <= 0 && meet(a.at, a.at + a.job.coldH, b.at, b.at + b.job.coldH)) return false
    if (apart < p.rules.exclusionM) {
      if (meet(a.at - a.job.prepHours, a.at, b.at, b.at + b.job.coldH)) return false
      if (meet(b.at - b.job.prepHours, b.at, a.at, a.at + a.job.coldH)) return false
    }
  }
  if (a.job.requires.includes(b.job.id) && a.at - a.job.prepHours < b.at + b.job.endH) return false
  return !(b.job.requires.includes(a.job.id) && b.at - b.job.prepHours < a.at + a.job.endH)
}

/** Whether power, sets, carts and crews are enough for all together. */
function togetherRight(p: ScheduleProblem, all: readonly Put[], fromH = 0, untilH = p.hours): boolean {
  for (let hour = fromH; hour < untilH; hour += 1) {
    let sum = 0
    const feeder = { west: 0, east: 0 }
    for (const { job: one, at } of all) {
      const kw = one.powerKW[hour - at] ?? 0
      sum += kw
      feeder.west += kw * one.feederShare.west
      feeder.east += kw * one.feederShare.east
    }
    const siteHour = (hour + 6) % 24
    const cap = (siteHour >= 6 && siteHour < 22 ? p.rules.dayKW : p.rules.nightKW) ?? 0
    if (sum > 0 && sum + p.rules.baseKW > cap + 1e-6) return false
    if (feeder.west > (p.rules.feederKW.west ?? 1e9) + 1e-6) return false
    if (feeder.east > (p.rules.feederKW.east ?? 1e9) + 1e-6) return false
  }
  // Like things: as many as are in use at once are enough, and most are in use where one is taken.
  for (const { at } of all) {
    const from = at - p.rules.setupHours
    const inUse = (untilOf: (one: ScheduleJob) => number): number =>
      all.filter((other) => other.at - p.rules.setupHours <= from && from < other.at + untilOf(other.job))
        .length
    if (inUse((one) => Math.max(one.soakEndH, one.powerKW.length)) > p.supplies.length) return false
    if (inUse((one) => one.coldH) > p.carts.length) return false
  }
  const moments = all.flatMap(({ job: one, at }) => [at, at + one.rampEndH, at + one.soakEndH])
  return moments.every(
    (at) =>
      moments.filter((other) => other <= at && at < other + p.rules.attendHours).length <= crewsAt(p, at),
  )
}

/** What is wrong with placements, by the checker of this file; empty when nothing is. */
export function faultsOf(p: ScheduleProblem, placements: readonly Placement[]): string[] {
  const all = placements.flatMap(({ jobId, startH }): Put[] => {
    const found = p.jobs.find(({ id }) => id === jobId)
    return found === undefined || startH === null ? [] : [{ job: found, at: startH }]
  })
  const faults: string[] = []
  for (const [i, one] of all.entries()) {
    if (!aloneRight(p, one)) faults.push(`${one.job.id} at ${one.at}`)
    for (const other of all.slice(i + 1))
      if (!pairRight(p, one, other)) faults.push(`${one.job.id} beside ${other.job.id}`)
  }
  if (!togetherRight(p, all)) faults.push('together')
  for (const what of ['supply', 'cart'] as const) {
    for (const [i, one] of placements.entries()) {
      for (const other of placements.slice(i + 1)) {
        const a = all.find((put) => put.job.id === one.jobId)
        const b = all.find((put) => put.job.id === other.jobId)
        if (a === undefined || b === undefined || one[what] !== other[what]) continue
        const until = (put: Put): number =>
          put.at + (what === 'cart' ? put.job.coldH : Math.max(put.job.soakEndH, put.job.powerKW.length))
        if (Math.max(a.at, b.at) - p.rules.setupHours < Math.min(until(a), until(b)))
          faults.push(`${one[what]} twice`)
      }
    }
  }
  return faults
}

/** Earliest hour by which all bakes can be over; null when no schedule holds them all. */
export function bestByEnumeration(p: ScheduleProblem): number | null {
  const options = p.jobs.map((one) => {
    const starts: number[] = []
    for (let at = 0; at < p.hours; at += p.stepHours) if (aloneRight(p, { job: one, at })) starts.push(at)
    return starts
  })
  // Long bakes first: their few places cut most of the rest away.
  const order = p.jobs.map((_, i) => i).sort((a, b) => (p.jobs[b]?.endH ?? 0) - (p.jobs[a]?.endH ?? 0))
  let best = Number.POSITIVE_INFINITY
  const put: Put[] = []
  const known = new Map<string, boolean>()
  // Whether two may stand so, power included: asked again and again, worked out once.
  const beside = (a: Put, b: Put): boolean => {
    const key = `${a.job.id} ${a.at} ${b.job.id} ${b.at}`
    let right = known.get(key)
    if (right === undefined) {
      // Before the first heats and after the last has heated there is no power to look at.
      const until = Math.max(...[a, b].map(({ job: one, at }) => at + one.powerKW.length))
      right = pairRight(p, a, b) && togetherRight(p, [a, b], Math.min(a.at, b.at), until)
      known.set(key, right)
    }
    return right
  }
  const go = (k: number, end: number): void => {
    const i = order[k]
    if (i === undefined) {
      best = end
      return
    }
    const one = p.jobs[i] as ScheduleJob
    for (const at of options[i] ?? []) {
      const until = Math.max(end, at + one.endH)
      if (until >= best) return
      const now = { job: one, at }
      if (put.some((other) => !beside(now, other))) continue
      put.push(now)
      // What stood there before was right: only the hours of the new one can be wrong.
      if (put.length < 3 || togetherRight(p, put, at, at + one.powerKW.length)) go(k + 1, until)
      put.pop()
    }
  }
  go(0, 0)
  return Number.isFinite(best) ? best : null
}
