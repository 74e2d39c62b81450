/** Slow change of a pressure, robust against single bursts. */

const WEEK_S = 7 * 86_400
const LEAST_VALUES = 28
/** Neighbours nearer than this say more about noise than about the trend. */
const LEAST_STEPS_APART = 8

/**
 * Relative change per week (0.06 is +6 % a week): the median of the slopes of ln p between all pairs of values that lie
 * far enough apart (Theil 1950, Sen 1968). Null with fewer than 28 values.
 *
 * @param values equally spaced values in Pa, oldest first; null where there is none
 * @param stepSeconds spacing of the values
 */
export function weeklyChange(values: readonly (number | null)[], stepSeconds: number): number | null {
  const points = values.flatMap((value, step) =>
    value === null || value <= 0 ? [] : [[step, Math.log(value)] as const],
  )
  if (points.length < LEAST_VALUES) return null
  const slopes: number[] = []
  for (const [index, [step, logValue]] of points.entries()) {
    for (const [laterStep, laterLog] of points.slice(index + 1)) {
      if (laterStep - step >= LEAST_STEPS_APART) slopes.push((laterLog - logValue) / (laterStep - step))
    }
  }
  slopes.sort((a, b) => a - b)
  const median = slopes[Math.floor(slopes.length / 2)]
  return median === undefined ? null : Math.exp((median * WEEK_S) / stepSeconds) - 1
}
