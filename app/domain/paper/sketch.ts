/** The exclusion area of a permit, drawn to scale along the tunnel. */
import { type Drawing, dots, hatch, type Shape } from './drawing.ts'

export interface SketchFacts {
  /** Heated stretch, chainage in metres. */
  fromM: number
  toM: number
  exclusionWestM: number
  exclusionEastM: number
  /** Segments of the same line, all of them. */
  segments: readonly { tag: string; startM: number; endM: number }[]
  /** Gate valves of the same line. */
  gates: readonly { tag: string; atM: number }[]
}

const WIDTH = 511
const HEIGHT = 196
const TUNNEL = { top: 52, bottom: 122 }
const TUBE = { top: 78, bottom: 96 }
const AXIS_Y = 146

/** Stretch nobody enters: the heated one and the exclusion at both ends, kept on the line. */
export function closedStretch(facts: SketchFacts): { fromM: number; toM: number } {
  const first = Math.min(...facts.segments.map(({ startM }) => startM))
  const last = Math.max(...facts.segments.map(({ endM }) => endM))
  return {
    fromM: Math.max(first, facts.fromM - facts.exclusionWestM),
    toM: Math.min(last, facts.toM + facts.exclusionEastM),
  }
}

function tickStep(metres: number): number {
  return [1, 2, 5, 10, 20, 50, 100, 200, 500].find((step) => metres / step <= 9) ?? 1000
}

/** Plan of the closed stretch with its barriers, the hot stretch, gate valves and chainage. */
export function sketchDrawing(facts: SketchFacts): Drawing {
  const closed = closedStretch(facts)
  const around = Math.max(8, (closed.toM - closed.fromM) * 0.16)
  const view = { from: closed.fromM - around, to: closed.toM + around }
  const x = (metre: number) => ((metre - view.from) / (view.to - view.from)) * WIDTH
  const inView = (metre: number) => metre >= view.from && metre <= view.to
  const box = (fromM: number, toM: number, band: { top: number; bottom: number }) => ({
    x: x(fromM),
    y: band.top,
    width: Math.max(0, x(toM) - x(fromM)),
    height: band.bottom - band.top,
  })
  const lineFrom = Math.max(0, x(Math.min(...facts.segments.map(({ startM }) => startM))))
  const lineTo = Math.min(WIDTH, x(Math.max(...facts.segments.map(({ endM }) => endM))))
  const shapes: Shape[] = []
  for (const y of [TUNNEL.top, TUNNEL.bottom]) {
    shapes.push({ kind: 'line', from: [lineFrom, y], to: [lineTo, y], width: 1.2 })
  }
  for (const [from, to] of [
    [closed.fromM, facts.fromM],
    [facts.toM, closed.toM],
  ] as const) {
    shapes.push(...dots(box(from, to, TUNNEL), 5))
  }
  const hot = box(facts.fromM, facts.toM, TUBE)
  shapes.push({
    kind: 'rect',
    x: lineFrom,
    y: TUBE.top,
    width: lineTo - lineFrom,
    height: TUBE.bottom - TUBE.top,
    fill: 'white',
  })
  shapes.push(...hatch(hot, 5, -1, 0.7))
  for (const y of [TUBE.top, TUBE.bottom]) {
    shapes.push({ kind: 'line', from: [lineFrom, y], to: [lineTo, y], width: 0.8 })
  }
  shapes.push({ kind: 'rect', ...hot, stroke: 1.6 })
  for (const { tag, atM } of facts.gates) if (inView(atM)) shapes.push(...gate(x(atM), tag))
  shapes.push(
    ...barrier(x(closed.fromM), closed.fromM, 'end'),
    ...barrier(x(closed.toM), closed.toM, 'start'),
  )
  for (const { tag, startM, endM } of facts.segments) {
    const from = Math.max(view.from, startM)
    const to = Math.min(view.to, endM)
    if (x(to) - x(from) < 30) continue
    shapes.push({
      kind: 'text',
      at: [(x(from) + x(to)) / 2, TUNNEL.bottom - 7],
      text: tag,
      size: 9,
      anchor: 'middle',
      bold: true,
    })
  }
  shapes.push(...axis(view, x), ...keys())
  return { width: WIDTH, height: HEIGHT, shapes }
}

function gate(x: number, tag: string): Shape[] {
  const middle = (TUBE.top + TUBE.bottom) / 2
  return [
    {
      kind: 'polygon',
      points: [
        [x - 6, TUBE.top - 3],
        [x, middle],
        [x - 6, TUBE.bottom + 3],
      ],
      fill: 'black',
    },
    {
      kind: 'polygon',
      points: [
        [x + 6, TUBE.top - 3],
        [x, middle],
        [x + 6, TUBE.bottom + 3],
      ],
      fill: 'black',
    },
    { kind: 'rect', x: x - 15, y: TUBE.top - 15, width: 30, height: 11, fill: 'white' },
    { kind: 'text', at: [x, TUBE.top - 7], text: tag, size: 8, anchor: 'middle' },
  ]
}

function barrier(x: number, atM: number, anchor: 'start' | 'end'): Shape[] {
  const label = { kind: 'text', at: [x, 20], size: 9, anchor: 'middle', bold: true } as const
  return [
    { kind: 'line', from: [x - 2.5, TUNNEL.top - 14], to: [x - 2.5, TUNNEL.bottom + 8], width: 2 },
    { kind: 'line', from: [x + 2.5, TUNNEL.top - 14], to: [x + 2.5, TUNNEL.bottom + 8], width: 2 },
    { ...label, text: anchor === 'end' ? 'West barrier' : 'East barrier' },
    { ...label, at: [x, 32], text: `${metres(atM)} m` },
  ]
}

function axis(view: { from: number; to: number }, x: (metre: number) => number): Shape[] {
  const step = tickStep(view.to - view.from)
  const shapes: Shape[] = [{ kind: 'line', from: [0, AXIS_Y], to: [WIDTH, AXIS_Y], width: 0.8 }]
  shapes.push({
    kind: 'text',
    at: [WIDTH, AXIS_Y + 26],
    text: 'chainage, metres from the west end',
    size: 8,
    anchor: 'end',
  })
  for (let at = Math.ceil(view.from / step) * step; at <= view.to; at += step) {
    if (at < 0) continue
    shapes.push({ kind: 'line', from: [x(at), AXIS_Y], to: [x(at), AXIS_Y + 4], width: 0.8 })
    const anchor = x(at) < 12 ? 'start' : x(at) > WIDTH - 20 ? 'end' : 'middle'
    shapes.push({ kind: 'text', at: [x(at), AXIS_Y + 14], text: `${at} m`, size: 8, anchor })
  }
  return shapes
}

function keys(): Shape[] {
  const y = 180
  const word = (at: number, text: string): Shape => ({
    kind: 'text',
    at: [at, y + 9],
    text,
    size: 8,
    anchor: 'start',
  })
  const box = (at: number) => ({ x: at, y, width: 22, height: 11 })
  return [
    ...hatch(box(0), 5, -1, 0.7),
    { kind: 'rect', ...box(0), stroke: 1.2 },
    word(27, 'heated tube'),
    ...dots(box(100), 4),
    { kind: 'rect', ...box(100), stroke: 0.5 },
    word(127, 'exclusion length, no entry'),
    { kind: 'line', from: [258, y], to: [258, y + 11], width: 2 },
    { kind: 'line', from: [263, y], to: [263, y + 11], width: 2 },
    word(270, 'barrier'),
    {
      kind: 'polygon',
      points: [
        [320, y],
        [326, y + 5.5],
        [320, y + 11],
      ],
      fill: 'black',
    },
    {
      kind: 'polygon',
      points: [
        [332, y],
        [326, y + 5.5],
        [332, y + 11],
      ],
      fill: 'black',
    },
    word(338, 'gate valve'),
  ]
}

/** Metres as they are written on a barrier: without digits that say nothing. */
export function metres(value: number): string {
  return Number(value.toFixed(1)).toString()
}
