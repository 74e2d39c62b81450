/** Why a bake cannot be at a time, or at none, in words. */
import { hourOptions } from './assignment.ts'
import { missingCaps } from './caps.ts'
import type { Placement, ScheduleJob, ScheduleProblem } from './problem.ts'
import { type Violation, violations } from './violations.ts'
import { dayWords, hourWords, kwWords } from './words.ts'

/**
 * What would break if one bake were moved to a start, the others staying where they are. Its set and cart are those
 * that are free then, if any are. Empty when it can go there.
 */
export function whyNot(
  problem: ScheduleProblem,
  placements: readonly Placement[],
  jobId: string,
  startH: number,
): { sentence: string; breaks: Violation[]; placement: Placement } {
  const job = jobOf(problem, jobId)
  const others = placements.filter((one) => one.jobId !== jobId)
  const before = new Set(breaking(problem, others).map(({ text }) => text))
  const placement = { jobId, startH, pinned: false, ...hourOptions(problem, others, job, startH) }
  const breaks = breaking(problem, [...others, placement]).filter(({ text }) => !before.has(text))
  const when = `${job.label} on ${hourWords(problem, startH)}`
  const sentence =
    breaks.length === 0
      ? `${when}: nothing stands in the way.`
      : `${job.label} not on ${dayWords(problem, startH)} at ${hourWords(problem, startH).slice(-5)}: ${breaks.map(({ text }) => withoutName(job, text)).join(' ')}`
  return { sentence, breaks, placement }
}

/** The sentence has named the bake already. */
function withoutName({ label }: ScheduleJob, text: string): string {
  const name = `${label}: `
  if (!text.startsWith(name)) return text
  return `${text.charAt(name.length).toUpperCase()}${text.slice(name.length + 1)}`
}

function breaking(problem: ScheduleProblem, placements: readonly Placement[]): Violation[] {
  return violations(problem, placements).filter(({ severity }) => severity === 'breaks')
}

function jobOf(problem: ScheduleProblem, jobId: string): ScheduleJob {
  const found = problem.jobs.find(({ id }) => id === jobId)
  if (found === undefined) throw new RangeError(`no bake ${jobId} in the schedule`)
  return found
}

/** Starts that are looked at to say why a bake has no place: enough to see what binds. */
const SAMPLES = 60

/**
 * Why a bake has no place in the window: what it asks for that the site never has, with what would lift it; else what
 * stands in the way most often.
 */
export function whyNowhere(
  problem: ScheduleProblem,
  placements: readonly Placement[],
  jobId: string,
): string[] {
  const job = jobOf(problem, jobId)
  const never = neverPossible(problem, job)
  if (never.length > 0) return never
  const last = Math.max(0, problem.hours - 1)
  const first = Math.min(last, Math.max(0, Math.ceil(job.prepHours), Math.ceil(job.earliestH)))
  const step = Math.max(1, Math.floor((last - first) / SAMPLES))
  const seen = new Map<string, { count: number; text: string }>()
  let looked = 0
  for (let start = first; start <= last; start += step) {
    looked += 1
    const kinds = new Set<string>()
    for (const { kind, text } of whyNot(problem, placements, jobId, start).breaks) {
      if (kinds.has(kind)) continue
      kinds.add(kind)
      const found = seen.get(kind)
      if (found === undefined) seen.set(kind, { count: 1, text })
      else found.count += 1
    }
  }
  return [...seen.values()]
    .sort((a, b) => b.count - a.count)
    .slice(0, 3)
    .map(({ count, text }) => `At ${count} of the ${looked} starts tried, for example: ${text}`)
}

/** What a bake needs and the site never has, each with what would lift it. */
export function neverPossible(problem: ScheduleProblem, job: ScheduleJob): string[] {
  const { rules, supplies, carts, crews } = problem
  const reasons = missingCaps(rules)
  const peak = Math.max(0, ...job.powerKW)
  const cap = Math.max(rules.dayKW ?? 0, rules.nightKW ?? 0)
  if (reasons.length === 0 && peak + rules.baseKW > cap)
    reasons.push(
      `${job.label} needs ${kwWords(peak)} kW at its peak; with ${kwWords(rules.baseKW)} kW base load the site gives ${kwWords(cap - rules.baseKW)} kW at most. Ramp slower, bake one segment at a time, or have the cap raised in the register.`,
    )
  for (const feeder of ['west', 'east'] as const) {
    const limit = rules.feederKW[feeder]
    const share = peak * job.feederShare[feeder]
    if (limit !== null && share > limit)
      reasons.push(
        `${job.label} draws ${kwWords(share)} kW from the feeder ${feeder}, which carries ${kwWords(limit)} kW. Ramp slower, or bake one segment at a time.`,
      )
  }
  const able = supplies.filter(({ maxAmps, maxVolts }) => maxAmps >= job.amps && maxVolts >= job.volts)
  if (able.length === 0)
    reasons.push(
      supplies.length === 0
        ? 'The register has no supply set. Enter one under Register.'
        : `${job.label} needs ${job.amps.toFixed(0)} A at ${job.volts.toFixed(1)} V, which none of ${supplies.map(({ tag }) => tag).join(', ')} gives. Bake at a lower temperature, ramp slower, or heat the segments apart.`,
    )
  else if (job.supply !== null && !able.some(({ tag }) => tag === job.supply))
    reasons.push(
      `The plan of ${job.label} asks for ${job.supply}, which cannot feed it; ${able[0]?.tag} can.`,
    )
  if (carts.length === 0) reasons.push('The register has no pumping cart. Enter one under Register.')
  if (!crews.some(({ size }) => size >= 2))
    reasons.push(
      'There is no crew of two. A start, a ramp end and a soak end each need one: enter a crew and its roster.',
    )
  if (job.prepHours + job.endH > problem.hours)
    reasons.push(
      `${job.label} takes ${((job.prepHours + job.endH) / 24).toFixed(1)} days with its preparation and test; the window has ${(problem.hours / 24).toFixed(1)}. Make the window longer.`,
    )
  return reasons
}
