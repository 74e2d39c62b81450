/** A word-sized curve on a log scale, without axes: it shows a course, and the figures stand beside it. */
const WIDTH = 96
const HEIGHT = 22
const PAD = 2
/** A course flatter than this many decades is drawn flat: noise must not look like a cliff. */
const LEAST_DECADES = 0.3

/**
 * @param values evenly spaced, oldest first; null, zero and negative values are gaps and stay gaps
 * @param label what the curve is of
 */
export function Sparkline({ values, label }: { values: readonly (number | null)[]; label: string }) {
  const { path, dots } = sparkPath(values)
  if (path === '' && dots.length === 0) return <span className="text-ink-3">no readings</span>
  return (
    <svg viewBox={`0 0 ${WIDTH} ${HEIGHT}`} width={WIDTH} height={HEIGHT} role="img" className="inline-block">
      <title>{`${label}: ${courseWords(values)}`}</title>
      <path d={path} fill="none" strokeWidth="1.4" className="stroke-ink-2" />
      {dots.map(({ x, y }) => (
        <circle key={x} cx={x} cy={y} r="1.2" className="fill-ink-2" />
      ))}
    </svg>
  )
}

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

function courseWords(values: readonly (number | null)[]): string {
  const known = values.flatMap((value) => (value !== null && value > 0 ? [value] : []))
  const [first, last] = [known[0], known.at(-1)]
  if (first === undefined || last === undefined) return 'no readings'
  const ratio = last / first
  const gaps = values.length - known.length
  const course =
    ratio > 1.05
      ? `up ${ratio.toFixed(1)} times`
      : ratio < 0.95
        ? `down ${(1 / ratio).toFixed(1)} times`
        : 'level'
  return gaps === 0 ? course : `${course}, with gaps`
}
