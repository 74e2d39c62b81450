/**
 * Drawings for paper as a list of plain shapes, so that page and PDF draw the same lines. Lengths in points (1/72 inch),
 * origin at the upper left. Black on white alone: what differs, differs by pattern, weight and words.
 */

export type Shape =
  | { kind: 'line'; from: Point; to: Point; width: number; dashed?: boolean }
  | { kind: 'path'; points: Point[]; width: number; dashed?: boolean }
  | {
      kind: 'rect'
      x: number
      y: number
      width: number
      height: number
      stroke?: number
      fill?: 'black' | 'white'
    }
  | { kind: 'polygon'; points: Point[]; fill: 'black' | 'white' }
  | {
      kind: 'text'
      at: Point
      text: string
      size: number
      anchor: 'start' | 'middle' | 'end'
      bold?: boolean
    }

type Point = readonly [x: number, y: number]

export interface Drawing {
  width: number
  height: number
  shapes: Shape[]
}

/** Smallest letters on paper, points. */
export const SMALLEST_PT = 8

/**
 * Parallel lines at 45° inside a rectangle, `step` apart along its sides.
 *
 * @param lean -1 for lines that rise to the right, 1 for lines that fall
 */
export function hatch(
  { x, y, width, height }: { x: number; y: number; width: number; height: number },
  step: number,
  lean: 1 | -1,
  weight: number,
): Shape[] {
  const shapes: Shape[] = []
  for (let along = step; along < width + height; along += step) {
    // The line runs from the left or lower edge to the upper or right one; mirrored where it falls.
    const a: Point = along <= height ? [0, along] : [along - height, height]
    const b: Point = along <= width ? [along, 0] : [width, along - width]
    const place = ([u, v]: Point): Point => [x + (lean === -1 ? u : width - u), y + v]
    shapes.push({ kind: 'line', from: place(a), to: place(b), width: weight })
  }
  return shapes
}

/** Dots in rows inside a rectangle. */
export function dots(
  { x, y, width, height }: { x: number; y: number; width: number; height: number },
  step: number,
): Shape[] {
  const shapes: Shape[] = []
  for (let row = 0; (row + 0.5) * step < height; row += 1) {
    for (let column = 0; (column + 0.5) * step < width; column += 1) {
      const at: Point = [x + (column + 0.5) * step, y + (row + 0.5) * step]
      shapes.push({ kind: 'rect', x: at[0] - 0.4, y: at[1] - 0.4, width: 0.8, height: 0.8, fill: 'black' })
    }
  }
  return shapes
}

/** A square of modules, `true` for dark, such as of a QR code, with nothing around it. */
export function modulesDrawing(modules: readonly (readonly boolean[])[], side: number): Drawing {
  const size = side / modules.length
  const shapes = modules.flatMap((row, y) =>
    darkRuns(row).map(
      ([from, to]): Shape => ({
        kind: 'rect',
        x: from * size,
        y: y * size,
        width: (to - from) * size,
        height: size,
        fill: 'black',
      }),
    ),
  )
  return { width: side, height: side, shapes }
}

/** Stretches of dark modules of a row, from and to. */
function darkRuns(row: readonly boolean[]): [number, number][] {
  const runs: [number, number][] = []
  for (const [x, dark] of row.entries()) {
    if (!dark) continue
    const last = runs.at(-1)
    if (last !== undefined && last[1] === x) last[1] = x + 1
    else runs.push([x, x + 1])
  }
  return runs
}
