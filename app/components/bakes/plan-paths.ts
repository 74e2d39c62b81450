/** Lines of the drawings of a plan. Pure. */

export interface Scale {
  y: (value: number) => number
  ticks: { value: number; label: string }[]
}

/** An SVG path through the points; a value that is not known breaks the line. */
export function curvePath(
  hours: readonly number[],
  values: readonly (number | null)[],
  x: (hour: number) => number,
  y: (value: number) => number,
): string {
  let path = ''
  let pen = false
  for (const [i, hour] of hours.entries()) {
    const value = values[i] ?? null
    if (value === null || !Number.isFinite(value)) {
      pen = false
      continue
    }
    path += `${pen ? 'L' : 'M'}${x(hour).toFixed(1)} ${y(value).toFixed(1)}`
    pen = true
  }
  return path
}
