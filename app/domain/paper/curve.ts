/** The heating that a permit allows, drawn over its hours, with where it stands. */
import type { Drawing, Shape } from './drawing.ts'

export interface CurveFacts {
  ambientC: number
  maxCelsius: number
  rampKH: number
  soakHours: number
  /** Way down after the soak, hours from its end; empty where nobody can tell how fast the part cools. */
  cooling: readonly { hours: number; celsius: number }[]
  /** Hours from the start of heating to the time of printing; null where it has not begun. */
  nowH: number | null
  /** Instant of hour 0 in words; null where heating has not begun. */
  startText: string | null
}

const WIDTH = 511
const HEIGHT = 230
const PLOT = { left: 40, right: 500, top: 22, bottom: 180 }

/** Corners of the curve, hours and °C. */
export function curvePoints(facts: CurveFacts): { hours: number; celsius: number }[] {
  const rampH = Math.max(0, facts.maxCelsius - facts.ambientC) / facts.rampKH
  const soakEnd = rampH + facts.soakHours
  return [
    { hours: 0, celsius: facts.ambientC },
    { hours: rampH, celsius: facts.maxCelsius },
    { hours: soakEnd, celsius: facts.maxCelsius },
    ...facts.cooling
      .filter(({ hours }) => hours > 0)
      .map(({ hours, celsius }) => ({ hours: soakEnd + hours, celsius })),
  ]
}

function hourStep(hours: number): number {
  return [1, 2, 4, 6, 12, 24, 48, 72].find((step) => hours / step <= 10) ?? 96
}

/** The curve with its axes, and a mark at the time of printing. */
export function curveDrawing(facts: CurveFacts): Drawing {
  const points = curvePoints(facts)
  const nowH = facts.nowH
  const lastH = Math.max(points.at(-1)?.hours ?? 1, nowH ?? 0) * 1.03
  const topC = Math.ceil((facts.maxCelsius + 10) / 20) * 20
  const x = (hours: number) => PLOT.left + (hours / lastH) * (PLOT.right - PLOT.left)
  const y = (celsius: number) => PLOT.bottom - (celsius / topC) * (PLOT.bottom - PLOT.top)
  const shapes: Shape[] = [
    { kind: 'line', from: [PLOT.left, PLOT.top], to: [PLOT.left, PLOT.bottom], width: 0.8 },
    { kind: 'line', from: [PLOT.left, PLOT.bottom], to: [PLOT.right, PLOT.bottom], width: 0.8 },
    { kind: 'text', at: [PLOT.left - 34, PLOT.top - 8], text: '°C', size: 8, anchor: 'start' },
  ]
  const step = topC > 120 ? 40 : 20
  for (let at = 0; at <= topC; at += step) {
    shapes.push({ kind: 'line', from: [PLOT.left - 3, y(at)], to: [PLOT.left, y(at)], width: 0.8 })
    shapes.push({ kind: 'text', at: [PLOT.left - 6, y(at) + 3], text: String(at), size: 8, anchor: 'end' })
  }
  const hours = hourStep(lastH)
  for (let at = 0; at <= lastH; at += hours) {
    shapes.push({ kind: 'line', from: [x(at), PLOT.bottom], to: [x(at), PLOT.bottom + 3], width: 0.8 })
    shapes.push({ kind: 'text', at: [x(at), PLOT.bottom + 13], text: `${at} h`, size: 8, anchor: 'middle' })
  }
  const maxAt = points[1]?.hours ?? 0
  shapes.push({
    kind: 'line',
    from: [PLOT.left, y(facts.maxCelsius)],
    to: [PLOT.right, y(facts.maxCelsius)],
    width: 0.5,
    dashed: true,
  })
  shapes.push({
    kind: 'text',
    at: [Math.max(PLOT.left + 4, x(maxAt)), y(facts.maxCelsius) - 4],
    text: `highest ${facts.maxCelsius} °C`,
    size: 8,
    anchor: 'start',
    bold: true,
  })
  shapes.push({
    kind: 'path',
    points: points.map((point) => [x(point.hours), y(point.celsius)] as const),
    width: 1.8,
  })
  if (nowH !== null && nowH >= 0 && nowH <= lastH) shapes.push(...nowMark(x(nowH)))
  shapes.push({
    kind: 'text',
    at: [PLOT.left, HEIGHT - 18],
    text:
      facts.startText === null
        ? 'Hours from the start of heating, which has not begun'
        : `Hours from the start of heating on ${facts.startText}`,
    size: 8,
    anchor: 'start',
  })
  return { width: WIDTH, height: HEIGHT, shapes }
}

function nowMark(x: number): Shape[] {
  return [
    { kind: 'line', from: [x, PLOT.top - 2], to: [x, PLOT.bottom], width: 1.4, dashed: true },
    {
      kind: 'polygon',
      points: [
        [x - 5, PLOT.top - 8],
        [x + 5, PLOT.top - 8],
        [x, PLOT.top - 1],
      ],
      fill: 'black',
    },
    {
      kind: 'text',
      at: [x, PLOT.top - 11],
      text: 'at printing',
      size: 8,
      anchor: x > PLOT.right - 30 ? 'end' : 'middle',
      bold: true,
    },
  ]
}
