import type { Drawing, Shape } from '#app/domain/paper/drawing.ts'

/** A drawing for paper, black on white whatever the screen's theme. What it shows stands in words beside it. */
export function PaperDrawing({ drawing, className }: { drawing: Drawing; className: string }) {
  const { width, height, shapes } = drawing
  return (
    <svg viewBox={`0 0 ${width} ${height}`} className={className} aria-hidden="true" focusable="false">
      {shapes.map((shape, index) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: shapes have no names and never change places
        <PaperShape key={index} shape={shape} />
      ))}
    </svg>
  )
}

function PaperShape({ shape }: { shape: Shape }) {
  switch (shape.kind) {
    case 'line':
      return (
        <line
          x1={shape.from[0]}
          y1={shape.from[1]}
          x2={shape.to[0]}
          y2={shape.to[1]}
          stroke="black"
          strokeWidth={shape.width}
          strokeDasharray={shape.dashed ? '4 3' : undefined}
        />
      )
    case 'path':
      return (
        <polyline
          points={pointsText(shape.points)}
          fill="none"
          stroke="black"
          strokeWidth={shape.width}
          strokeDasharray={shape.dashed ? '4 3' : undefined}
        />
      )
    case 'rect':
      return (
        <rect
          x={shape.x}
          y={shape.y}
          width={shape.width}
          height={shape.height}
          fill={shape.fill ?? 'none'}
          stroke={shape.fill === undefined ? 'black' : 'none'}
          strokeWidth={shape.stroke ?? 1}
        />
      )
    case 'polygon':
      return <polygon points={pointsText(shape.points)} fill={shape.fill} />
    case 'text':
      return (
        <text
          x={shape.at[0]}
          y={shape.at[1]}
          fontSize={shape.size}
          fontWeight={shape.bold ? 600 : 400}
          textAnchor={shape.anchor}
          fill="black"
        >
          {shape.text}
        </text>
      )
  }
}

function pointsText(points: readonly (readonly [number, number])[]): string {
  return points.map(([x, y]) => `${x},${y}`).join(' ')
}
