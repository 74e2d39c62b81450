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
  const { aligned, kind, xLog, zone, unit, palette, cursor, onCursor } = props
  const hostRef = useRef<HTMLDivElement>(null)
  const chartRef = useRef<{ chart: uPlot; drawn: Aligned } | null>(null)
  // What the chart's hooks draw: they are made once, and data may change under a hand many times a second.
  const nowRef = useRef(props)
  const onCursorRef = useRef(onCursor)
  useEffect(() => {
    onCursorRef.current = onCursor
    nowRef.current = props
  })
  // Curves of the same names, looks and bands take new data in; any others make a new chart.
  const shape = JSON.stringify(aligned.columns.map(({ label, role, band }) => [label, role, band !== null]))

  // biome-ignore lint/correctness/useExhaustiveDependencies: the shape stands for what is made of the curves
  useEffect(() => {
    const host = hostRef.current
    if (host === null) return
    const { series, bands } = seriesOf(aligned, palette, (at) => nowRef.current.aligned.columns[at])
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
          x: {
            time: kind === 'time',
            distr: xLog ? 3 : 1,
            range: () => xRange(nowRef.current.aligned.x, nowRef.current.now, xLog),
          },
          y: { distr: 3, range: () => yRange(nowRef.current.decades) },
        },
        axes: [xAxis(kind, xLog, zone, palette), yAxis(() => nowRef.current.decades, palette)],
        series,
        bands,
        hooks: {
          drawAxes: [
            (u) => {
              const plot = plotOf(u)
              const held = nowRef.current
              drawDecades(plot, held.decades, unit, palette)
              drawLevels(plot, held.levels, palette)
              if (held.now !== null) drawNow(plot, held.now, palette)
            },
          ],
          draw: [(u) => drawMarks(plotOf(u), nowRef.current.marks, palette)],
          setCursor: [(u) => onCursorRef.current(u.cursor.idx ?? null)],
        },
      },
      dataOf(aligned),
      host,
    )
    chartRef.current = { chart, drawn: aligned }
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
  }, [shape, kind, xLog, zone, unit, palette])

  // Levels, marks and decades come anew with the data that they were made from.
  useEffect(() => {
    const held = chartRef.current
    if (held === null || held.drawn === aligned) return
    held.drawn = aligned
    held.chart.setData(dataOf(aligned))
  }, [aligned])

  useEffect(() => {
    const chart = chartRef.current?.chart
    const place = cursor === null ? undefined : aligned.x[cursor]
    if (chart === undefined || place === undefined || chart.cursor.idx === cursor) return
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

function yRange(decades: readonly Decade[]): [number, number] {
  return [decades[0]?.value ?? 1e-9, decades.at(-1)?.value ?? 1]
}

function yAxis(decades: () => readonly Decade[], palette: Palette): uPlot.Axis {
  return {
    scale: 'y',
    size: 54,
    splits: () => decades().map(({ value }) => value),
    // The figures are drawn by hand, for the sake of their exponents.
    values: (_u, splits) => splits.map(() => ''),
    grid: { stroke: palette.rule2, width: 1 },
    ticks: { show: false },
  }
}

/** @param columnNow the curve as it is when the chart draws, by its number */
function seriesOf(aligned: Aligned, palette: Palette, columnNow: (at: number) => Column | undefined) {
  const series: uPlot.Series[] = [{}]
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
    }
    series.push({
      stroke: palette[color],
      width,
      dash: dashOf(aligned.columns, at),
      points: { show: true, size: 4, fill: palette[color], filter: () => aloneIn(columnNow(at)) },
    })
  }
  return { series, bands }
}

/** The columns in the order of the series: a curve's band before it. */
function dataOf({ x, columns }: Aligned): uPlot.AlignedData {
  const data: Cell[][] = columns.flatMap(({ y, band }) => (band === null ? [y] : [band.high, band.low, y]))
  return [x, ...data] as uPlot.AlignedData
}

/** Values with a gap on either side: no line shows them, so a dot must. */
function aloneIn(column: Column | undefined): number[] {
  const known = (column?.y ?? []).flatMap((cell, at) => (cell === undefined ? [] : [{ at, cell }]))
  return known.flatMap(({ at, cell }, step) =>
    cell !== null && (known[step - 1]?.cell ?? null) === null && (known[step + 1]?.cell ?? null) === null
      ? [at]
      : [],
  )
}
