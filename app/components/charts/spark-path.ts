export const WIDTH = 96
export const HEIGHT = 22
const PAD = 2
/** A course flatter than this many decades is drawn flat: noise must not look like a cliff. */
const LEAST_DECADES = 0.3

/** The path, with a new beginning after every gap, and dots for values that stand alone. */
export function sparkPath(values: readonly (number | null)[]): {
  path: string
  dots: { x: number; y: number }[]
} {
  const logs = values.map((value) => (value === null || value <= 0 ? null : Math.log10(value)))
  const known = logs.filter((log) => log !== null)
  const middle = known.length === 0 ? 0 : (Math.min(...known) + Math.max(...known)) / 2
  const half = known.length === 0 ? 1 : Math.max(LEAST_DECADES, Math.max(...known) - Math.min(...known)) / 2
  const step = (WIDTH - 2 * PAD) / Math.max(1, values.length - 1)
  const at = (index: number, log: number) => ({
    x: Number((PAD + index * step).toFixed(1)),
    y: Number((HEIGHT / 2 - ((log - middle) / half) * (HEIGHT / 2 - PAD)).toFixed(1)),
  })
  let path = ''
  const dots: { x: number; y: number }[] = []
  for (const [index, log] of logs.entries()) {
    if (log === null) continue
    const { x, y } = at(index, log)
    const [before, after] = [logs[index - 1] ?? null, logs[index + 1] ?? null]
    if (before === null && after === null) dots.push({ x, y })
    else path += `${before === null ? 'M' : 'L'}${x} ${y}`
  }
  return { path, dots }
}
