/**
 * Bakes that are to be placed in time, and everything that limits where they can go. Hours are elapsed hours from the
 * start of the window, so that a clock change neither makes nor loses one; the calendar turns them into site time.
 * Everything here can be sent to a browser as it is.
 */
import type { Feeder } from '../register.ts'
import type { Roster } from './rosters.ts'

/** A stretch of tunnel, metres. A spur has one on its own line and one, of no length, where it leaves the other. */
export interface Extent {
  line: string
  fromM: number
  toM: number
}

/** One bake. Hours count from the start of heating, which is also the first energising. */
export interface ScheduleJob {
  id: string
  /** Its segments, such as `SG-11+SG-12`. */
  label: string
  extents: readonly Extent[]
  /** Share of the heat that each feeder carries; a share that is missing is on neither. */
  feederShare: Readonly<Record<Feeder, number>>
  /** Preparation before the start of heating. */
  prepHours: number
  /** Mean power of each hour from the start of heating, at ramp end the peak. */
  powerKW: readonly number[]
  rampEndH: number
  soakEndH: number
  /** Touch limit reached: the place may be entered and the cart taken away. */
  coldH: number
  /** Test after the bake is over. */
  endH: number
  /** What a supply set must give at most. */
  amps: number
  volts: number
  /** Set and cart that the plan asks for; null for any. */
  supply: string | null
  cart: string | null
  /** First hour at which heating may begin, and the reason for it in words; the permit's lead time for one. */
  earliestH: number
  earliestWhy: string
  /** Last hour at which everything is to be over; null for the end of the window. */
  latestEndH: number | null
  /** Bakes that must be over before this one is prepared. */
  requires: readonly string[]
  /** Permits that its hot time needs, one after another. */
  permits: number
  /** Steps that are still missing, in words. They don't keep a bake off the calendar, but off the tube. */
  missing: readonly string[]
  /** Hot already: it stays where it is, and is not judged. */
  underWay: boolean
}

export interface ScheduleSupply {
  tag: string
  maxAmps: number
  maxVolts: number
}

export interface ScheduleCrew {
  code: string
  size: number
  roster: Roster
  /** Milliseconds since 1970 at which the crew ceases to be; null for never. */
  endsMs: number | null
}

export interface ScheduleRules {
  /** Caps of the site; the base load is inside them. Null where the register has none, and then no bake has power. */
  dayKW: number | null
  nightKW: number | null
  baseKW: number
  /** Site hours between which the day cap holds. */
  dayFromHour: number
  dayToHour: number
  /** What each feeder carries, without the base load; null for no limit. */
  feederKW: Readonly<Record<Feeder, number | null>>
  /** Nobody works nearer to a hot segment than this, m. */
  exclusionM: number
  /** A supply set or cart is tied up for so long before heating, for its way and its fitting. */
  setupHours: number
  /** How long a pair stays with a start, a ramp end and a soak end. */
  attendHours: number
}

export interface ScheduleProblem {
  /** Start of the window, milliseconds since 1970, at a full site hour. */
  fromMs: number
  /** Length of the window. */
  hours: number
  zone: string
  /** Starts are looked for every so many hours. */
  stepHours: number
  jobs: readonly ScheduleJob[]
  supplies: readonly ScheduleSupply[]
  carts: readonly string[]
  crews: readonly ScheduleCrew[]
  /** Site dates, YYYY-MM-DD. */
  holidays: readonly string[]
  rules: ScheduleRules
}

/** Where a bake is put. Without a start it has no place yet. */
export interface Placement {
  jobId: string
  startH: number | null
  supply: string | null
  cart: string | null
  /** The search leaves it where it is. */
  pinned: boolean
}

/** A bake with its start, for arithmetic. */
export interface Placed {
  job: ScheduleJob
  startH: number
}

/** Heating is on from the start until here, hours from the start. */
export function heatEndH(job: ScheduleJob): number {
  return Math.max(job.soakEndH, job.powerKW.length)
}

/** Energy of one bake, kWh. */
export function energyKWh(job: ScheduleJob): number {
  return job.powerKW.reduce((sum, kw) => sum + kw, 0)
}

/** Distance between two bakes along the tunnel, m; 0 where they share a valve box, Infinity on lines that do not meet. */
export function distanceM(a: ScheduleJob, b: ScheduleJob): number {
  let nearest = Number.POSITIVE_INFINITY
  for (const one of a.extents) {
    for (const other of b.extents) {
      if (one.line !== other.line) continue
      nearest = Math.min(nearest, Math.max(0, one.fromM - other.toM, other.fromM - one.toM))
    }
  }
  return nearest
}

/** Whether a set can feed a bake. */
export function canFeed(supply: ScheduleSupply, job: ScheduleJob): boolean {
  const able = supply.maxAmps >= job.amps && supply.maxVolts >= job.volts
  return able && (job.supply === null || job.supply === supply.tag)
}
