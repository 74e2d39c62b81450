/** Curves on their way into a chart: put on one axis, with gaps kept as gaps. Pure. */
export type SeriesRole = 'measured' | 'predicted' | 'forecast'

/** A curve in Pa. `null` is a gap, and a gap is never bridged. */
export interface ChartSeries {
  label: string
  role: SeriesRole
  /** Own places, ascending; without them the chart's. */
  x?: readonly number[]
  y: readonly (number | null)[]
  low?: readonly (number | null)[]
  high?: readonly (number | null)[]
}

/** `undefined` is a place that belongs to another curve: the line goes on across it. */
export type Cell = number | null | undefined

export interface Column {
  label: string
  role: SeriesRole
  y: Cell[]
  /** Lower and upper edge of the curve's band; null for a curve without one. */
  band: { low: Cell[]; high: Cell[] } | null
}

export interface Aligned {
  x: number[]
  columns: Column[]
  /** Values of zero or below, which a log axis has no place for. */
  leftOut: number
}

/**
 * Puts curves on one axis of places.
 *
 * @param xLog leaves out places at zero or before, which have no logarithm
 * @returns values in Pa
 */
export function alignSeries(x: readonly number[], series: readonly ChartSeries[], xLog: boolean): Aligned {
  const all = [...new Set([...x, ...series.flatMap((one) => one.x ?? [])])]
    .filter((place) => Number.isFinite(place) && (!xLog || place > 0))
    .sort((a, b) => a - b)
  const index = new Map(all.map((place, at) => [place, at]))
  let leftOut = 0
  const spread = (places: readonly number[], values: readonly (number | null)[], counts: boolean): Cell[] => {
    const cells = new Array<Cell>(all.length).fill(undefined)
    for (const [at, place] of places.entries()) {
      const to = index.get(place)
      if (to === undefined) continue
      const value = values[at] ?? null
      if (value !== null && value <= 0 && counts) leftOut += 1
      cells[to] = value === null || value <= 0 || !Number.isFinite(value) ? null : value
    }
    return cells
  }
  const columns = series.map(({ label, role, x: own, y, low, high }): Column => {
    const places = own ?? x
    return {
      label,
      role,
      y: spread(places, y, true),
      band:
        low === undefined || high === undefined
          ? null
          : { low: spread(places, low, false), high: spread(places, high, false) },
    }
  })
  return { x: all, columns, leftOut }
}

/** Every value that must fit on the pressure axis. */
export function axisValuesOf({ columns }: Aligned, levels: readonly number[]): number[] {
  const cells = columns.flatMap(({ y, band }) => [...y, ...(band?.low ?? []), ...(band?.high ?? [])])
  return [...levels, ...cells.filter((cell) => cell !== null && cell !== undefined)]
}

/** First, last, least and greatest of a curve with their places; null for a curve without values. */
export function extremesOf(x: readonly number[], { y }: Column) {
  const points = y.flatMap((cell, at) => {
    const place = x[at]
    return cell === null || cell === undefined || place === undefined ? [] : [{ x: place, value: cell }]
  })
  const [first, last] = [points[0], points.at(-1)]
  if (first === undefined || last === undefined) return null
  const least = points.reduce((a, b) => (b.value < a.value ? b : a))
  const greatest = points.reduce((a, b) => (b.value > a.value ? b : a))
  return { first, last, least, greatest }
}

/**
 * What a curve says at a place that may be another curve's: its own cell nearest to it, between its ends. A gap stays a
 * gap, and before its first and after its last place a curve says nothing.
 */
export function cellNear(x: readonly number[], { y }: Column, at: number): Cell {
  const here = x[at]
  if (y[at] !== undefined || here === undefined) return y[at]
  let before = at - 1
  while (before >= 0 && y[before] === undefined) before -= 1
  let after = at + 1
  while (after < y.length && y[after] === undefined) after += 1
  const [left, right] = [x[before], x[after]]
  if (left === undefined || right === undefined) return undefined
  return here - left <= right - here ? y[before] : y[after]
}

/**
 * Rows for a table of at most `most` places, evenly spread, the last place always among them. Rows stand where something
 * was measured, and go on where only a curve does.
 */
export function tableRows({ x, columns }: Aligned, most: number): { x: number; values: Cell[] }[] {
  const measured = columns.filter(({ role }) => role === 'measured')
  const ends = measured.map(({ y }) => y.findLastIndex((cell) => cell !== undefined))
  const end = Math.max(-1, ...ends)
  const used = [...x.keys()].filter((at) => at > end || measured.some(({ y }) => y[at] !== undefined))
  const every = Math.max(1, Math.ceil(used.length / most))
  return used
    .filter((_, row) => (used.length - 1 - row) % every === 0)
    .map((at) => ({ x: x[at] ?? 0, values: columns.map((column) => cellNear(x, column, at)) }))
}
