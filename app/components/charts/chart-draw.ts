/** What a chart draws over and under its curves: decades, levels, events, and now. Lengths are CSS pixels. */
import type { Palette } from '#app/hooks/use-palette.ts'

/** As much of a plot as is needed here; `place` gives device pixels. */
export interface Plot {
  ctx: CanvasRenderingContext2D
  left: number
  top: number
  width: number
  height: number
  /** Device pixels to the CSS pixel. */
  ratio: number
  place: (value: number, axis: 'x' | 'y') => number
}

export interface Level {
  value: number
  label: string
}

/** A power of ten of the reader's unit, and where it lies on the axis. */
export interface Decade {
  exponent: number
  value: number
}

const FONT = '"IBM Plex Sans", system-ui, sans-serif'
const MARK = 15
const MARK_ROWS = 4

function font(plot: Plot, size: number, weight = 400): string {
  return `${weight} ${size * plot.ratio}px ${FONT}`
}

/** Powers of ten at the left edge, with a raised exponent as it is written, not as a font happens to have it. */
export function drawDecades(plot: Plot, ticks: readonly Decade[], unit: string, palette: Palette): void {
  const { ctx, ratio } = plot
  ctx.save()
  ctx.fillStyle = palette.ink3
  ctx.textAlign = 'right'
  ctx.textBaseline = 'middle'
  const right = plot.left - 8 * ratio
  for (const { exponent, value } of ticks) {
    const y = plot.place(value, 'y')
    if (y < plot.top - 1 || y > plot.top + plot.height + 1) continue
    const raised = String(exponent).replace('-', '−')
    ctx.font = font(plot, 9)
    ctx.fillText(raised, right, y - 5 * ratio)
    const room = ctx.measureText(raised).width
    ctx.font = font(plot, 12)
    ctx.fillText('10', right - room - ratio, y)
  }
  ctx.font = font(plot, 12)
  ctx.fillText(unit, right, plot.top - 19 * ratio)
  ctx.restore()
}

/** Targets and limits: dashed lines from edge to edge, each with its word. */
export function drawLevels(plot: Plot, levels: readonly Level[], palette: Palette): void {
  const { ctx, ratio } = plot
  ctx.save()
  ctx.fillStyle = palette.ink2
  ctx.lineJoin = 'round'
  ctx.font = font(plot, 12)
  ctx.textAlign = 'left'
  ctx.textBaseline = 'bottom'
  for (const { value, label } of levels) {
    const y = plot.place(value, 'y')
    if (y < plot.top || y > plot.top + plot.height) continue
    ctx.strokeStyle = palette.ink3
    ctx.lineWidth = 1.5 * ratio
    ctx.setLineDash([4 * ratio, 3 * ratio])
    ctx.beginPath()
    ctx.moveTo(plot.left, y)
    ctx.lineTo(plot.left + plot.width, y)
    ctx.stroke()
    ctx.setLineDash([])
    // A rim of paper keeps the word readable where a curve runs through it.
    ctx.strokeStyle = palette.sheet
    ctx.lineWidth = 4 * ratio
    ctx.strokeText(label, plot.left + 5 * ratio, y - 2 * ratio)
    ctx.fillText(label, plot.left + 5 * ratio, y - 2 * ratio)
  }
  ctx.restore()
}

/** Events: dotted verticals with the number under which the list beside the chart explains them. */
export function drawMarks(plot: Plot, places: readonly number[], palette: Palette): void {
  const { ctx, ratio } = plot
  ctx.save()
  ctx.font = font(plot, 11, 500)
  ctx.textAlign = 'center'
  ctx.textBaseline = 'middle'
  const rows = new Array<number>(MARK_ROWS).fill(Number.NEGATIVE_INFINITY)
  for (const [at, value] of places.entries()) {
    const x = plot.place(value, 'x')
    // Also true of no place at all, which zero has on a log axis.
    if (!(x >= plot.left && x <= plot.left + plot.width)) continue
    // Neighbours step down a row, so that no number covers another.
    const free = rows.findIndex((last) => x - last > MARK * ratio * 1.2)
    const row = free < 0 ? MARK_ROWS - 1 : free
    rows[row] = x
    const y = plot.top + (row + 0.5) * (MARK + 2) * ratio
    ctx.strokeStyle = palette.ink3
    ctx.lineWidth = ratio
    ctx.setLineDash([2 * ratio, 3 * ratio])
    ctx.beginPath()
    ctx.moveTo(x, y)
    ctx.lineTo(x, plot.top + plot.height)
    ctx.stroke()
    ctx.setLineDash([])
    ctx.fillStyle = palette.sheet
    ctx.strokeStyle = palette.ink2
    ctx.beginPath()
    ctx.rect(x - (MARK / 2) * ratio, y - (MARK / 2) * ratio, MARK * ratio, MARK * ratio)
    ctx.fill()
    ctx.stroke()
    ctx.fillStyle = palette.ink
    ctx.fillText(String(at + 1), x, y + 0.5 * ratio)
  }
  ctx.restore()
}

/** The present: one solid vertical with its word. */
export function drawNow(plot: Plot, now: number, palette: Palette): void {
  const { ctx, ratio } = plot
  const x = plot.place(now, 'x')
  if (x < plot.left || x > plot.left + plot.width + 1) return
  ctx.save()
  ctx.strokeStyle = palette.ink2
  ctx.fillStyle = palette.ink2
  ctx.lineWidth = 1.5 * ratio
  ctx.beginPath()
  ctx.moveTo(x, plot.top)
  ctx.lineTo(x, plot.top + plot.height)
  ctx.stroke()
  ctx.font = font(plot, 12)
  ctx.textBaseline = 'bottom'
  ctx.textAlign = x > plot.left + plot.width - 40 * ratio ? 'right' : 'left'
  ctx.fillText('now', x + (ctx.textAlign === 'right' ? -5 : 5) * ratio, plot.top + plot.height - 4 * ratio)
  ctx.restore()
}
