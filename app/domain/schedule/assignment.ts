/** A free supply set and cart for a bake at a start. */
import { canFeed, type Placement, type ScheduleJob, type ScheduleProblem } from './problem.ts'
import { heldHours } from './violations.ts'

/**
 * The set and cart that a bake can have at a start beside others: those its plan asks for, else the first free ones,
 * else the first that would do at all; null where the site has none.
 */
export function hourOptions(
  problem: ScheduleProblem,
  others: readonly Placement[],
  job: ScheduleJob,
  startH: number,
): { supply: string | null; cart: string | null } {
  const able = problem.supplies.filter((supply) => canFeed(supply, job)).map(({ tag }) => tag)
  const carts = job.cart === null ? problem.carts : problem.carts.filter((tag) => tag === job.cart)
  const pick = (tags: readonly string[], what: 'supply' | 'cart'): string | null =>
    tags.find((tag) => isFree(problem, others, job, startH, tag, what)) ?? tags[0] ?? null
  return { supply: pick(able, 'supply'), cart: pick(carts, 'cart') }
}

function isFree(
  problem: ScheduleProblem,
  others: readonly Placement[],
  job: ScheduleJob,
  startH: number,
  tag: string,
  what: 'supply' | 'cart',
): boolean {
  const [from, until] = heldHours(problem, { job, startH }, what)
  return others.every((other) => {
    const held = problem.jobs.find(({ id }) => id === other.jobId)
    if (held === undefined || other.startH === null || other[what] !== tag) return true
    const [a, b] = heldHours(problem, { job: held, startH: other.startH }, what)
    return b <= from || until <= a
  })
}
