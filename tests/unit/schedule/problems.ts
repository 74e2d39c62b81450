/** Problems that several tests of the schedule share. */
import type { Placement, ScheduleCrew, ScheduleJob, ScheduleProblem } from '#app/domain/schedule/problem.ts'

const EVERY_DAY = [0, 1, 2, 3, 4, 5, 6]

/** Crews that are always there. */
export function everPresent(count: number): ScheduleCrew[] {
  return Array.from({ length: count }, (_, i) => ({
    code: `C${i + 1}`,
    size: 2,
    roster: { worked: [{ days: EVERY_DAY, from: '00:00', to: '24:00' }], onCall: null },
    endsMs: null,
  }))
}

/** Monday to Friday 06:45 to 19:00; on call by turns. */
export function twoCrews(): ScheduleCrew[] {
  const worked = [{ days: [1, 2, 3, 4, 5], from: '06:45', to: '19:00' }]
  return [
    {
      code: 'A',
      size: 2,
      roster: { worked, onCall: { firstMonday: '2026-11-09', everyWeeks: 2 } },
      endsMs: null,
    },
    {
      code: 'B',
      size: 2,
      roster: { worked, onCall: { firstMonday: '2026-11-02', everyWeeks: 2 } },
      endsMs: null,
    },
  ]
}

export function job(id: string, more: Partial<ScheduleJob> = {}): ScheduleJob {
  return {
    id,
    label: id,
    extents: [],
    feederShare: { west: 0, east: 0 },
    prepHours: 0,
    powerKW: [],
    rampEndH: 0,
    soakEndH: more.powerKW?.length ?? 0,
    coldH: more.powerKW?.length ?? 0,
    endH: more.powerKW?.length ?? 0,
    amps: 100,
    volts: 10,
    supply: null,
    cart: null,
    earliestH: 0,
    earliestWhy: '',
    latestEndH: null,
    requires: [],
    permits: 1,
    missing: [],
    underWay: false,
    ...more,
  }
}

export function supplies(count: number): ScheduleProblem['supplies'] {
  return Array.from({ length: count }, (_, i) => ({ tag: `HX-${i + 1}`, maxAmps: 1500, maxVolts: 60 }))
}

/** Carts enough that they never bind. */
export function manyCarts(count = 12): string[] {
  return Array.from({ length: count }, (_, i) => `MC-${i + 1}`)
}

export function problem(more: Partial<ScheduleProblem> & Pick<ScheduleProblem, 'jobs'>): ScheduleProblem {
  return {
    // Monday 2026-11-09 06:00 at the demo's site.
    fromMs: Date.parse('2026-11-09T05:00:00Z'),
    hours: 14 * 24,
    zone: 'Europe/Vienna',
    stepHours: 1,
    supplies: supplies(3),
    carts: manyCarts(),
    crews: everPresent(20),
    holidays: [],
    ...more,
    rules: {
      dayKW: 200,
      nightKW: 260,
      baseKW: 18,
      dayFromHour: 6,
      dayToHour: 22,
      feederKW: { west: 140, east: 160 },
      exclusionM: 10,
      setupHours: 0,
      attendHours: 1,
      ...more.rules,
    },
  }
}

/** Each bake at an hour, on a supply set and cart of its own. */
export function placed(starts: Record<string, number>): Placement[] {
  return Object.entries(starts).map(([jobId, startH], i) => ({
    jobId,
    startH,
    supply: `HX-${i + 1}`,
    cart: `MC-${i + 1}`,
    pinned: false,
  }))
}
