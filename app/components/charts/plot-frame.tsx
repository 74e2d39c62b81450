/**
 * A small plot that needs no script: shapes stretch with the page, words keep their size. The children draw in a square
 * of 1000 by 1000, x to the right and y down; strokes keep their width.
 */
export interface Tick {
  /** Place along the axis, 0 to 1 from its start. */
  share: number
  label: string
}

/**
 * @param label what is drawn, for readers who do not see it
 * @param heightClass height of the drawing, such as `h-40`
 * @param yTicks from the bottom up
 */
export function PlotFrame({
  label,
  title,
  heightClass,
  xTicks,
  yTicks,
  children,
}: {
  label: string
  /** Quantity and unit of the upright axis. */
  title: string
  heightClass: string
  xTicks: readonly Tick[]
  yTicks: readonly Tick[]
  children: React.ReactNode
}) {
  return (
    <div className="mb-1">
      <p className="mb-1 text-sm text-ink-2">{title}</p>
      <div className={`relative ml-14 mr-3 ${heightClass}`}>
        {yTicks.map((tick) => (
          <span
            key={`${tick.share} ${tick.label}`}
            aria-hidden="true"
            className="absolute -left-14 w-12 translate-y-1/2 text-right text-xs whitespace-nowrap text-ink-3"
            style={{ bottom: `${tick.share * 100}%` }}
          >
            {tick.label}
          </span>
        ))}
        <svg
          role="img"
          aria-label={label}
          viewBox="0 0 1000 1000"
          preserveAspectRatio="none"
          className="absolute inset-0 h-full w-full overflow-visible"
        >
          {yTicks.map((tick) => (
            <line
              key={`${tick.share} ${tick.label}`}
              x1={0}
              x2={1000}
              y1={1000 - tick.share * 1000}
              y2={1000 - tick.share * 1000}
              className="stroke-rule-2"
              vectorEffect="non-scaling-stroke"
            />
          ))}
          <line
            x1={0}
            x2={1000}
            y1={1000}
            y2={1000}
            className="stroke-rule"
            vectorEffect="non-scaling-stroke"
          />
          {children}
        </svg>
      </div>
      <div aria-hidden="true" className="relative mr-3 ml-14 h-5 text-xs text-ink-3">
        {xTicks.map((tick) => (
          <span
            key={`${tick.share} ${tick.label}`}
            className="absolute -translate-x-1/2 whitespace-nowrap"
            style={{ left: `${tick.share * 100}%` }}
          >
            {tick.label}
          </span>
        ))}
      </div>
    </div>
  )
}

/** Path through the places that have a value, broken where one is missing; x and y are shares, 0 to 1. */
export function linePath(points: readonly { x: number; y: number | null }[]): string {
  let path = ''
  let drawing = false
  for (const { x, y } of points) {
    if (y === null) {
      drawing = false
      continue
    }
    path += `${drawing ? 'L' : 'M'}${(x * 1000).toFixed(1)} ${(1000 - y * 1000).toFixed(1)}`
    drawing = true
  }
  return path
}

/** Closed bands between a low and a high course, one for each stretch in which both are known. */
export function bandPath(points: readonly { x: number; low: number | null; high: number | null }[]): string {
  const pieces: { x: number; low: number; high: number }[][] = []
  let piece: { x: number; low: number; high: number }[] = []
  for (const { x, low, high } of points) {
    if (low === null || high === null) {
      if (piece.length > 1) pieces.push(piece)
      piece = []
    } else piece.push({ x, low, high })
  }
  if (piece.length > 1) pieces.push(piece)
  const at = (x: number, y: number) => `${(x * 1000).toFixed(1)} ${(1000 - y * 1000).toFixed(1)}`
  return pieces
    .map((one) => {
      const up = one.map(({ x, high }) => at(x, high)).join('L')
      const back = [...one]
        .reverse()
        .map(({ x, low }) => at(x, low))
        .join('L')
      return `M${up}L${back}Z`
    })
    .join('')
}

/** Round numbers from `low` to `high`, about `wanted` of them. */
export function roundTicks(low: number, high: number, wanted = 5): number[] {
  if (!(high > low)) return [low]
  const rough = (high - low) / wanted
  const power = 10 ** Math.floor(Math.log10(rough))
  const step = ([1, 2, 5, 10].find((times) => times * power >= rough) ?? 10) * power
  const ticks: number[] = []
  for (let value = Math.ceil(low / step - 1e-9) * step; value <= high + step * 1e-9; value += step) {
    ticks.push(Number(value.toPrecision(12)))
  }
  return ticks
}
