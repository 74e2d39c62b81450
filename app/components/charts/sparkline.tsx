import { HEIGHT, sparkPath, WIDTH } from './spark-path.ts'

/**
 * A word-sized curve on a log scale, without axes: it shows a course, and the figures stand beside it.
 *
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
