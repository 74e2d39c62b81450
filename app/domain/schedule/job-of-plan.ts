/** From a bake plan and what is predicted of it to a bake that can be placed. */
import { type BakePlanContent, permitWindows, stepOf } from '../bake-plan.ts'
import type { PlanPrediction } from '../bake-plan-prediction.ts'
import type { Feeder } from '../register.ts'
import type { Extent, ScheduleJob } from './problem.ts'

/** A segment of the plan, as far as its place and its cable matter. */
export interface PlannedPlace {
  extents: readonly Extent[]
  feeder: Feeder | null
  lengthM: number
}

export interface PlanToPlace {
  id: number
  content: BakePlanContent
  prediction: PlanPrediction
  places: readonly PlannedPlace[]
  load: { amps: number; volts: number }
  missing: readonly string[]
  underWay: boolean
  earliestH: number
  earliestWhy: string
}

/** The bake of a plan. Power is the highest of each hour, so that the peak at ramp end counts in full. */
export function jobOfPlan(plan: PlanToPlace): ScheduleJob {
  const { content, prediction, places } = plan
  const { steps } = prediction
  const cold = stepOf(steps, 'cool-down').toH
  const soakEnd = stepOf(steps, 'soak').toH
  const length = places.reduce((sum, place) => sum + place.lengthM, 0)
  const share = (feeder: Feeder): number =>
    places.reduce((sum, place) => sum + (place.feeder === feeder ? place.lengthM / length : 0), 0)
  return {
    id: String(plan.id),
    label: content.segments.join('+'),
    extents: places.flatMap(({ extents }) => extents),
    feederShare: { west: share('west'), east: share('east') },
    prepHours: content.prepHours,
    powerKW: powerByHour(prediction, content.cooling.kind === 'natural' ? soakEnd : cold),
    rampEndH: stepOf(steps, 'ramp').toH,
    soakEndH: soakEnd,
    coldH: cold,
    endH: stepOf(steps, 'post-bake-test').toH,
    amps: plan.load.amps,
    volts: plan.load.volts,
    supply: content.supply,
    cart: content.cart,
    earliestH: plan.earliestH,
    earliestWhy: plan.earliestWhy,
    latestEndH: null,
    requires: [],
    permits: permitWindows(steps).length,
    missing: plan.missing,
    underWay: plan.underWay,
  }
}

function powerByHour({ hours, powerKW }: PlanPrediction, heatEnd: number): number[] {
  const at = (hour: number): number => {
    const k = hours.findIndex((one) => one >= hour)
    if (k <= 0) return powerKW[Math.max(0, k)] ?? 0
    const [from = 0, to = 0] = [hours[k - 1], hours[k]]
    const [low = 0, high = 0] = [powerKW[k - 1], powerKW[k]]
    return to <= from ? high : low + ((hour - from) / (to - from)) * (high - low)
  }
  return Array.from({ length: Math.ceil(heatEnd) }, (_, hour) => {
    const until = Math.min(hour + 1, heatEnd)
    const inside = powerKW.filter((_kw, i) => (hours[i] ?? -1) >= hour && (hours[i] ?? -1) <= until)
    return Math.round(Math.max(at(hour), at(until), ...inside) * 1000) / 1000
  })
}
