/** What is asked when bakes are compared: the segments as they stand, the site's limits, the target. */
import type { SegmentModel } from '../physics/segment-gas.ts'
import type { BakedSegment } from './bake-load.ts'
import type { OptionPart, OptionSite } from './bake-options-demands.ts'

/** Coolest and hottest bakes looked at, and the step between them, °C. */
export const COOLEST_C = 60
export const HOTTEST_C = 200
export const DEFAULT_STEP_C = 5

export interface OptionSegment {
  baked: BakedSegment
  /** While it is hot, on the pump of the bake. */
  hot: SegmentModel
  /** Pumps that hold it in service. */
  afterPumps: SegmentModel['pumps']
  /** The gauge that will read highest, metres from the start of the segment. */
  gauge: { tag: string; offsetM: number }
  /** Hours of cold pumping before the heat. */
  coldHours: number
  parts: readonly OptionPart[]
  waterAssumed: boolean
  hydrogenAssumed: boolean
}

export interface OptionQuestion {
  /** One segment, or two in series. */
  segments: readonly OptionSegment[]
  site: OptionSite
  /** Nitrogen-equivalent reading that the cold segments are to meet, Pa. */
  targetPa: number
  coolestC: number
  hottestC: number
  stepC?: number
}
