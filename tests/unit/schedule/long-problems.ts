/** A month like the demo's, and half a year of bakes. Power by tube from the demo's own table, kW at 150 °C. */

import type { ScheduleJob, ScheduleProblem } from '#app/domain/schedule/problem.ts'
import { addWorkingDays } from '#app/domain/schedule/rosters.ts'
import { job, manyCarts, problem, supplies, twoCrews } from './problems.ts'

const RAMP_H = 13.2
const SOAK_H = 168
/** Soak and heat-up of one tube, and its blankets, kW. */
const WIDE = { soak: 25.3, up: 9.4 }
const NARROW = { soak: 21.6, up: 7.8 }
const BLANKET = 6

interface Asked {
  segments: readonly number[]
  soakH?: number
  more?: Partial<ScheduleJob>
}

/** A bake of one main segment, or of two in series; segments are 150 m long, the west feeder ends after the eighth. */
export function bakeOf({ segments, soakH = SOAK_H, more = {} }: Asked): ScheduleJob {
  const first = segments[0] as number
  const east = first > 8
  const tube = east ? NARROW : WIDE
  const bins = Math.ceil(RAMP_H + soakH)
  const powerKW = Array.from({ length: bins }, (_, hour) => {
    const rise = Math.min(1, (hour + 1) / RAMP_H)
    const on = Math.min(1, RAMP_H + soakH - hour)
    const up = hour < RAMP_H ? tube.up : 0
    return segments.length * (tube.soak * rise + up + BLANKET) * on
  })
  const label = segments.map((one) => `SG-${String(one).padStart(2, '0')}`).join('+')
  return job(label, {
    extents: segments.map((one) => ({ line: 'MAIN', fromM: (one - 1) * 150, toM: one * 150 })),
    feederShare: { west: east ? 0 : 1, east: east ? 1 : 0 },
    prepHours: 48,
    powerKW,
    rampEndH: RAMP_H,
    soakEndH: RAMP_H + soakH,
    coldH: RAMP_H + soakH + 9,
    endH: RAMP_H + soakH + 33,
    amps: tube === WIDE ? 1267 : 1067,
    volts: segments.length * 27.6,
    ...more,
  })
}

/** Five weeks from Monday 2026-11-09 08:00: one bake is in soak, five are wanted, 8 December is a holiday. */
export function demoMonth(): ScheduleProblem {
  const fromMs = Date.parse('2026-11-09T07:00:00Z')
  const lead = (addWorkingDays(fromMs, 2, 'Europe/Vienna', ['2026-12-08']) - fromMs) / 3_600_000
  const asked: Asked[] = [
    { segments: [11, 12] },
    { segments: [16] },
    { segments: [14] },
    { segments: [7] },
    { segments: [1, 2] },
  ]
  return problem({
    fromMs,
    hours: 35 * 24,
    holidays: ['2026-12-08'],
    crews: twoCrews(),
    carts: manyCarts(4),
    supplies: supplies(3),
    rules: { ...problem({ jobs: [] }).rules, setupHours: 4 },
    jobs: [
      bakeOf({ segments: [5], more: { underWay: true, supply: 'HX-1', cart: 'MC-1' } }),
      ...asked.map((one) =>
        bakeOf({
          ...one,
          more: { earliestH: lead, earliestWhy: 'two working days after its permit is asked for' },
        }),
      ),
    ],
  })
}

/** So many bakes on half a year, each of another length; four sets and six crews that take turns. */
export function halfYear(count: number): ScheduleProblem {
  return problem({
    hours: 180 * 24,
    crews: [...twoCrews(), ...twoCrews().map((crew) => ({ ...crew, code: `${crew.code}2` }))],
    carts: manyCarts(6),
    supplies: supplies(4),
    stepHours: 3,
    holidays: ['2026-12-08', '2026-12-25', '2027-01-01'],
    rules: { ...problem({ jobs: [] }).rules, dayKW: 200, nightKW: 260, setupHours: 4 },
    jobs: Array.from({ length: count }, (_, i) => ({
      ...bakeOf({ segments: [1 + ((i * 5) % 16)], soakH: 96 + ((i * 37) % 120) }),
      id: `J${i}`,
      label: `J${i}`,
    })),
  })
}
