/** What a schedule is good for, in figures: less is better in each. */
import type { ScheduleObjective } from '../planning.ts'
import { energyKWh } from './problem.ts'
import { type Compiled, callIns, type SearchJob } from './search-state.ts'

export const OBJECTIVE_FACTS: Record<ScheduleObjective, { label: string; unit: string; says: string }> = {
  'earliest-finish': {
    label: 'Earliest finish',
    unit: 'h',
    says: 'hours from the start of the window until the last test is over',
  },
  'least-energy': {
    label: 'Least energy',
    unit: 'kWh',
    says: 'heat of all bakes, and the base load while any of them is heated',
  },
  'fewest-nights': {
    label: 'Fewest nights',
    unit: 'call-ins',
    says: 'starts, ramp ends and soak ends for which the pair on call has to come in',
  },
}

interface Timed {
  one: SearchJob
  startH: number
}

/** Figure of the objective for bakes in their places; those under way count where they cannot be left out. */
export function figureOf(
  compiled: Compiled,
  objective: ScheduleObjective,
  entries: readonly Timed[],
): number {
  const planned = entries.filter(({ one }) => !one.job.underWay)
  switch (objective) {
    case 'earliest-finish':
      return planned.reduce((last, { one, startH }) => Math.max(last, startH + one.job.endH), 0)
    case 'least-energy':
      return (
        planned.reduce((sum, { one }) => sum + energyKWh(one.job), 0) +
        compiled.problem.rules.baseKW * heatedHours(entries)
      )
    case 'fewest-nights':
      return planned.reduce((sum, { one, startH }) => sum + callIns(compiled.calendar, one, startH), 0)
  }
}

/** Hours of the window in which any bake is heated. */
function heatedHours(entries: readonly Timed[]): number {
  const spans = entries
    .map(({ one, startH }): [number, number] => [Math.max(0, startH), startH + one.heatH])
    .sort((a, b) => a[0] - b[0])
  let sum = 0
  let until = 0
  for (const [from, to] of spans) {
    if (to <= until) continue
    sum += to - Math.max(from, until)
    until = to
  }
  return sum
}
