/** The one place that draws with uPlot. Everything else about a chart is plain React beside it. */
import { useEffect, useRef } from 'react'
import uPlot from 'uplot'
import 'uplot/dist/uPlot.min.css'
import type { Palette } from '#app/hooks/use-palette.ts'
import { shortDayText, timeText } from '../ui/site-time.ts'
import type { Aligned, Cell, Column, SeriesRole } from './chart-data.ts'
import {
  type Decade,
  drawDecades,
  drawLevels,
  drawMarks,
  drawNow,
  type Level,
  type Plot,
} from './chart-draw.ts'

const DAY_MS = 86_400_000
const HEIGHT = 340

export type ChartKind = 'time' | 'hours'

interface CanvasProps {
  aligned: Aligned
  kind: ChartKind
  xLog: boolean
  zone: string
  unit: string
  /** Powers of ten on the pressure axis; the first and last are its edges. */
  decades: readonly Decade[]
  levels: readonly Level[]
  marks: readonly number[]
  now: number | null
  palette: Palette
  /** Index of the place that is read out; null for none. */
  cursor: number | null
  onCursor: (index: number | null) => void
}

/** How the curves of a role are drawn; the second and third of a role differ by their dashes. */
export const ROLE_LOOKS: Record<SeriesRole, { color: 'ink' | 'vac'; width: number; dashes: number[][] }> = {
  measured: { color: 'ink', width: 1.8, dashes: [[], [7, 3], [2, 3]] },
  predicted: { color: 'vac', width: 2, dashes: [[], [2, 3], [7, 3]] },
  forecast: { color: 'vac', width: 2, dashes: [[7, 4], [], [2, 3]] },
}

/** Dashes of a curve among those of its role. */
export function dashOf(columns: readonly { role: SeriesRole }[], at: number): number[] {
  const role = columns[at]?.role ?? 'measured'
  const before = columns.slice(0, at).filter((column) => column.role === role).length
  const { dashes } = ROLE_LOOKS[role]
  return dashes[before % dashes.length] ?? []
}

export function UplotCanvas(props: CanvasProps) {
  const { aligned, kind, xLog, zone, unit, decades, levels, marks, now, palette, cursor, onCursor } = props
  const hostRef = useRef<HTMLDivElement>(null)
  const chartRef = useRef<uPlot | null>(null)
  const onCursorRef = useRef(onCursor)
  useEffect(() => {
    onCursorRef.current = onCursor
  })

  useEffect(() => {
    const host = hostRef.current
    if (host === null) return
    const { series, data, bands } = seriesOf(aligned, palette)
    const chart = new uPlot(
      {
        width: host.clientWidth,
        height: HEIGHT,
        ms: 1,
        tzDate: (at) => uPlot.tzDate(new Date(at), zone),
        padding: [26, 12, 0, 0],
        legend: { show: false },
        cursor: { drag: { x: false, y: false }, y: false, points: { size: 7 } },
        scales: {
          x: { time: kind === 'time', distr: xLog ? 3 : 1, range: () => xRange(aligned.x, now, xLog) },
          y: { distr: 3, range: [decades[0]?.value ?? 1e-9, decades.at(-1)?.value ?? 1] },
        },
        axes: [xAxis(kind, xLog, zone, palette), yAxis(decades, palette)],
        series,
        bands,
        hooks: {
          drawAxes: [
            (u) => {
              const plot = plotOf(u)
              drawDecades(plot, decades, unit, palette)
              drawLevels(plot, levels, palette)
              if (now !== null) drawNow(plot, now, palette)
            },
          ],
          draw: [(u) => drawMarks(plotOf(u), marks, palette)],
          setCursor: [(u) => onCursorRef.current(u.cursor.idx ?? null)],
        },
      },
      data,
      host,
    )
    chartRef.current = chart
    const observer = new ResizeObserver(() => chart.setSize({ width: host.clientWidth, height: HEIGHT }))
    observer.observe(host)
    // The first drawing may come before the typeface; its labels are then set again.
    let alive = true
    void document.fonts.ready.then(() => {
      if (alive) chart.redraw(false)
    })
    return () => {
      alive = false
      observer.disconnect()
      chart.destroy()
      chartRef.current = null
    }
  }, [aligned, kind, xLog, zone, unit, decades, levels, marks, now, palette])

  useEffect(() => {
    const chart = chartRef.current
    const place = cursor === null ? undefined : aligned.x[cursor]
    if (chart === null || place === undefined || chart.cursor.idx === cursor) return
    chart.setCursor({ left: chart.valToPos(place, 'x'), top: chart.over.clientHeight / 2 }, false)
  }, [cursor, aligned])

  return <div ref={hostRef} aria-hidden="true" className="w-full" style={{ height: HEIGHT }} />
}

function plotOf(u: uPlot): Plot {
  const { left, top, width, height } = u.bbox
  return {
    ctx: u.ctx,
    left,
    top,
    width,
    height,
    ratio: uPlot.pxRatio,
    place: (value, axis) => u.valToPos(value, axis, true),
  }
}

function xRange(x: readonly number[], now: number | null, xLog: boolean): [number, number] {
  const first = x[0] ?? (xLog ? 1 : 0)
  const last = Math.max(x.at(-1) ?? first, now ?? first)
  if (last > first) return [first, last]
  return xLog ? [first / 2, first * 2] : [first - 1, first + 1]
}

function xAxis(kind: ChartKind, xLog: boolean, zone: string, palette: Palette): uPlot.Axis {
  const look = {
    stroke: palette.ink3,
    font: '12px "IBM Plex Sans", system-ui, sans-serif',
    grid: { stroke: palette.rule2, width: 1 },
    ticks: { stroke: palette.rule, width: 1, size: 5 },
  }
  if (kind === 'time') {
    return {
      ...look,
      values: (_u, splits: (number | null)[], _axis, _space, step) =>
        splits.map((at) => {
          if (at === null) return null
          const time = timeText(new Date(at), zone)
          return step >= DAY_MS || time === '00:00' ? shortDayText(new Date(at), zone) : time
        }),
    }
  }
  return {
    ...look,
    ...(xLog ? { splits: (_u: uPlot, _axis: number, min: number, max: number) => roundHours(min, max) } : {}),
    // uPlot passes null where it leaves a tick without a word.
    values: (_u, splits: (number | null)[]) =>
      splits.map((hours) => (hours === null ? null : `${Number(hours.toPrecision(6))} h`)),
  }
}

/** 1, 2 and 5 times every power of ten inside a range. */
function roundHours(min: number, max: number): number[] {
  const found: number[] = []
  for (let power = Math.floor(Math.log10(min)); power <= Math.log10(max); power += 1) {
    found.push(
      ...[1, 2, 5].map((factor) => factor * 10 ** power).filter((hours) => hours >= min && hours <= max),
    )
  }
  return found
}

function yAxis(decades: readonly Decade[], palette: Palette): uPlot.Axis {
  return {
    scale: 'y',
    size: 54,
    splits: () => decades.map(({ value }) => value),
    // The figures are drawn by hand, for the sake of their exponents.
    values: (_u, splits) => splits.map(() => ''),
    grid: { stroke: palette.rule2, width: 1 },
    ticks: { show: false },
  }
}

function seriesOf(aligned: Aligned, palette: Palette) {
  const series: uPlot.Series[] = [{}]
  const data: Cell[][] = [aligned.x]
  const bands: uPlot.Band[] = []
  const edge = { width: 0, stroke: 'transparent', points: { show: false } }
  for (const [at, column] of aligned.columns.entries()) {
    const { color, width } = ROLE_LOOKS[column.role]
    if (column.band !== null) {
      bands.push({
        series: [series.length, series.length + 1],
        fill: color === 'ink' ? palette.rule : palette.vacSoft,
      })
      series.push(edge, edge)
      data.push(column.band.high, column.band.low)
    }
    series.push({
      stroke: palette[color],
      width,
      dash: dashOf(aligned.columns, at),
      points: { show: true, size: 4, fill: palette[color], filter: () => aloneIn(column) },
    })
    data.push(column.y)
  }
  return { series, bands, data: data as uPlot.AlignedData }
}

/** Values with a gap on either side: no line shows them, so a dot must. */
function aloneIn({ y }: Column): number[] {
  const known = y.flatMap((cell, at) => (cell === undefined ? [] : [{ at, cell }]))
  return known.flatMap(({ at, cell }, step) =>
    cell !== null && (known[step - 1]?.cell ?? null) === null && (known[step + 1]?.cell ?? null) === null
      ? [at]
      : [],
  )
}
