/** Bakes × days, planned and actual, and beneath it the power of each hour against its cap. */

import { calendarOf } from '#app/domain/schedule/calendar.ts'
import type { Placement, ScheduleProblem } from '#app/domain/schedule/problem.ts'
import { heatByHour } from '#app/domain/schedule/violations.ts'
import { dayWords, hourWords } from '#app/domain/schedule/words.ts'
import type { ActualBake } from '#app/services/schedule-of-bakes-page.server.ts'

const WIDTH = 960
const LEFT = 110
const ROW = 34
const POWER = 120
const DAY_H = 24

interface PictureProps {
  problem: ScheduleProblem
  placements: readonly Placement[]
  actual: readonly ActualBake[]
  broken: ReadonlySet<string>
  chosen: string | null
  /** Called with a new start when a bake is dragged or moved by keys; null where nobody may move anything. */
  onMove: ((jobId: string, startH: number) => void) | null
  onChoose: (jobId: string) => void
}

/** The picture. Its rows can be focused: arrows move a bake by an hour, with Shift by a day. */
export function SchedulePicture(props: PictureProps) {
  const { problem, placements, actual } = props
  const days = Math.ceil(problem.hours / DAY_H)
  const top = 22
  const rowsEnd = top + placements.length * ROW
  const x = (hour: number): number =>
    LEFT + (Math.min(problem.hours, Math.max(0, hour)) / problem.hours) * (WIDTH - LEFT)
  const every = Math.max(1, Math.ceil(days / 14))
  return (
    <div className="overflow-x-auto">
      <svg
        viewBox={`0 0 ${WIDTH} ${rowsEnd + POWER + 20}`}
        className="w-full min-w-[640px] text-ink"
        aria-label="Bakes by day, and power by hour. The table below says the same in words."
      >
        {Array.from({ length: days }, (_, day) => day).map((day) => (
          <g key={day}>
            <line
              x1={x(day * DAY_H)}
              x2={x(day * DAY_H)}
              y1={top - 4}
              y2={rowsEnd + POWER}
              className="stroke-rule"
            />
            {day % every === 0 && (
              <text x={x(day * DAY_H) + 2} y={12} className="fill-current text-[10px]">
                {dayWords(problem, day * DAY_H)}
              </text>
            )}
          </g>
        ))}
        {placements.map((placement, row) => (
          <Row key={placement.jobId} {...props} placement={placement} y={top + row * ROW} x={x} />
        ))}
        {placements.map(({ jobId }, row) => {
          const label = problem.jobs.find(({ id }) => id === jobId)?.label.split('+') ?? []
          return actual
            .filter(({ segment, untilH }) => label.includes(segment) && untilH > 0)
            .map(({ segment, fromH, untilH }) => (
              <rect
                key={`${segment}-${fromH}`}
                x={x(fromH)}
                y={top + row * ROW + 24}
                width={Math.max(1, x(untilH) - x(fromH))}
                height={5}
                className="fill-current opacity-70"
              >
                <title>{`${segment} was hot`}</title>
              </rect>
            ))
        })}
        <PowerSum problem={problem} placements={placements} x={x} top={rowsEnd + 8} />
      </svg>
    </div>
  )
}

function Row({
  problem,
  placement,
  broken,
  chosen,
  onMove,
  onChoose,
  y,
  x,
}: PictureProps & { placement: Placement; y: number; x: (hour: number) => number }) {
  const job = problem.jobs.find(({ id }) => id === placement.jobId)
  if (job === undefined) return null
  const { startH } = placement
  const movable = onMove !== null && !job.underWay && !placement.pinned
  const state = broken.has(job.id) ? 'breaks a rule' : 'fits'
  const where = startH === null ? 'no place yet' : `heating from ${hourWords(problem, startH)}, ${state}`
  const parts: [number, number, string][] =
    startH === null
      ? []
      : [
          [startH - job.prepHours, startH, 'opacity-25'],
          [startH, startH + job.rampEndH, 'opacity-90'],
          [startH + job.rampEndH, startH + job.soakEndH, 'opacity-60'],
          [startH + job.soakEndH, startH + job.coldH, 'opacity-40'],
          [startH + job.coldH, startH + job.endH, 'opacity-25'],
        ]
  const drag = (event: React.PointerEvent<SVGGElement>): void => {
    onChoose(job.id)
    const box = event.currentTarget.ownerSVGElement?.getBoundingClientRect()
    if (!movable || startH === null || box === undefined) return
    const hourPx = (box.width * ((WIDTH - LEFT) / WIDTH)) / problem.hours
    const fromX = event.clientX
    const target = event.currentTarget
    target.setPointerCapture(event.pointerId)
    const follow = (moved: PointerEvent): void =>
      onMove?.(job.id, startH + Math.round((moved.clientX - fromX) / hourPx))
    const end = (): void => {
      target.removeEventListener('pointermove', follow)
      target.removeEventListener('pointerup', end)
      target.removeEventListener('pointercancel', end)
    }
    target.addEventListener('pointermove', follow)
    target.addEventListener('pointerup', end)
    target.addEventListener('pointercancel', end)
  }
  const keys = (event: React.KeyboardEvent): void => {
    if (event.key === 'Enter' || event.key === ' ') {
      // The page would scroll on the space bar.
      event.preventDefault()
      onChoose(job.id)
    }
    const sign = event.key === 'ArrowRight' ? 1 : event.key === 'ArrowLeft' ? -1 : 0
    if (sign === 0 || !movable || startH === null) return
    event.preventDefault()
    onChoose(job.id)
    onMove?.(job.id, startH + sign * (event.shiftKey ? DAY_H : 1))
  }
  const mark =
    startH === null
      ? { x: LEFT + 4, words: 'no place yet' }
      : placement.pinned
        ? { x: x(startH) + 3, words: 'pinned' }
        : null
  return (
    <>
      {/* biome-ignore lint/a11y/useSemanticElements: a button cannot stand inside a picture */}
      <g
        role="button"
        tabIndex={0}
        aria-label={`${job.label}: ${where}${placement.pinned ? ', pinned' : ''}`}
        aria-pressed={chosen === job.id}
        onPointerDown={drag}
        onKeyDown={keys}
      >
        <rect
          x={0}
          y={y}
          width={WIDTH}
          height={ROW - 2}
          className={chosen === job.id ? 'fill-rule-2' : 'fill-transparent'}
        />
        <text x={4} y={y + 16} className="fill-current text-[12px] font-medium">
          {job.label}
        </text>
        {parts.map(([from, until, shade]) => (
          <rect
            key={`${from}-${shade}`}
            x={x(from)}
            y={y + 4}
            width={Math.max(0, x(until) - x(from))}
            height={18}
            // A finger on the bar moves the bake; beside it, the page.
            className={`${broken.has(job.id) ? 'fill-bad' : 'fill-heat'} ${shade} ${movable ? 'cursor-grab touch-none' : ''}`}
          />
        ))}
      </g>
      {/* Beside the button, whose name says the same. */}
      {mark !== null && (
        <text x={mark.x} y={y + 17} className="pointer-events-none fill-current text-[11px] font-medium">
          {mark.words}
        </text>
      )}
    </>
  )
}

function PowerSum({
  problem,
  placements,
  x,
  top,
}: {
  problem: ScheduleProblem
  placements: readonly Placement[]
  x: (hour: number) => number
  top: number
}) {
  const placed = placements.flatMap(({ jobId, startH }) => {
    const job = problem.jobs.find(({ id }) => id === jobId)
    return job === undefined || startH === null ? [] : [{ job, startH }]
  })
  const { site } = heatByHour(problem, placed)
  const { capKW } = calendarOf(problem)
  const { baseKW } = problem.rules
  const cap = Math.max(...capKW)
  const highest = Math.max(1, cap, ...site.map((kw) => kw + baseKW)) * 1.05
  const y = (kw: number): number => top + (POWER - 20) * (1 - kw / highest)
  const steps = (value: (hour: number) => number): string =>
    Array.from({ length: problem.hours }, (_, hour) => {
      const level = y(value(hour)).toFixed(1)
      return `${hour === 0 ? 'M' : 'L'}${x(hour).toFixed(1)},${level}L${x(hour + 1).toFixed(1)},${level}`
    }).join('')
  const load = steps((hour) => (site[hour] ?? 0) + baseKW)
  return (
    <g>
      <text x={4} y={top + 14} className="fill-current text-[12px]">
        Power, kW
      </text>
      {cap > 0 && (
        <text x={LEFT - 4} y={y(cap) + 4} textAnchor="end" className="fill-current text-[10px]">
          {cap}
        </text>
      )}
      <text x={LEFT - 4} y={y(0)} textAnchor="end" className="fill-current text-[10px]">
        0
      </text>
      <path d={`${load}L${x(problem.hours)},${y(0)}L${x(0)},${y(0)}Z`} className="fill-heat opacity-40" />
      {cap > 0 && (
        <path d={steps((hour) => capKW[hour] ?? 0)} className="fill-none stroke-bad" strokeWidth={1.2} />
      )}
    </g>
  )
}
