/**
 * Bakes that meet the target, temperature against the time each takes; the larger a disc, the more energy. Figures stand
 * in the table beside it.
 */
import { type BakeOptionRow, energyText, hoursText } from '#app/domain/bake-options.ts'
import { roundStep } from '../charts/scales.ts'

const WIDTH = 640
const HEIGHT = 300
const LEFT = 52
const RIGHT = 24
const TOP = 18
const BOTTOM = 44
/** Discs from a dot to this, in units of the drawing. */
const LARGEST = 17
const SMALLEST = 4

/** Times that a mark may stand at, h. */
const TIME_MARKS = [6, 12, 24, 48, 96, 168, 336, 720, 1440, 2880, 8766]

export function OptionsPicture({ rows }: { rows: readonly BakeOptionRow[] }) {
  const [first] = rows
  if (first === undefined) return null
  const shortest = Math.min(...rows.map(({ totalHours }) => totalHours))
  const longest = Math.max(...rows.map(({ totalHours }) => totalHours))
  const low = Math.log(shortest / 1.2)
  const high = Math.log(longest * 1.2)
  const across = (hours: number) => LEFT + ((Math.log(hours) - low) / (high - low)) * (WIDTH - LEFT - RIGHT)
  const coolest = Math.min(...rows.map(({ celsius }) => celsius)) - 8
  const hottest = Math.max(...rows.map(({ celsius }) => celsius)) + 8
  const up = (celsius: number) =>
    HEIGHT - BOTTOM - ((celsius - coolest) / (hottest - coolest)) * (HEIGHT - TOP - BOTTOM)
  const most = Math.max(...rows.map(({ energyKWh }) => energyKWh))
  const times = timeMarks(shortest / 1.2, longest * 1.2)
  const step = roundStep(hottest - coolest, 5)
  const degrees = Array.from(
    { length: Math.floor(hottest / step) - Math.ceil(coolest / step) + 1 },
    (_, i) => (Math.ceil(coolest / step) + i) * step,
  )
  return (
    // biome-ignore lint/a11y/useSemanticElements: a fieldset groups controls; this groups a drawing that scrolls
    <div
      role="group"
      aria-label="Drawing of the options"
      // biome-ignore lint/a11y/noNoninteractiveTabindex: without it the keyboard could not scroll the drawing
      tabIndex={0}
      className="overflow-x-auto"
    >
      <svg
        viewBox={`0 0 ${WIDTH} ${HEIGHT}`}
        className="w-full min-w-[30rem] max-w-[54rem]"
        role="img"
        aria-label={pictureWords(rows)}
      >
        {times.map((hours) => (
          <g key={hours}>
            <line
              x1={across(hours)}
              x2={across(hours)}
              y1={TOP}
              y2={HEIGHT - BOTTOM}
              className="stroke-rule"
            />
            <text
              x={across(hours)}
              y={HEIGHT - BOTTOM + 16}
              textAnchor="middle"
              className="fill-ink-2 text-[12px]"
            >
              {timeText(hours)}
            </text>
          </g>
        ))}
        {degrees.map((celsius) => (
          <g key={celsius}>
            <line x1={LEFT} x2={WIDTH - RIGHT} y1={up(celsius)} y2={up(celsius)} className="stroke-rule-2" />
            <text x={LEFT - 6} y={up(celsius) + 4} textAnchor="end" className="fill-ink-2 text-[12px]">
              {celsius} °C
            </text>
          </g>
        ))}
        <text x={WIDTH - RIGHT} y={HEIGHT - 8} textAnchor="end" className="fill-ink-2 text-[12px]">
          ramp, soak and cooling together
        </text>
        {rows.map(({ celsius, totalHours, energyKWh }) => (
          <circle
            key={celsius}
            cx={across(totalHours)}
            cy={up(celsius)}
            r={SMALLEST + (LARGEST - SMALLEST) * Math.sqrt(energyKWh / most)}
            className="fill-heat-soft stroke-ink stroke-[1.5]"
          >
            {/* One string: the server writes a title of several parts empty, and the page's code then finds a difference. */}
            <title>{`${celsius} °C: ${hoursText(totalHours)}, ${energyText(energyKWh)}`}</title>
          </circle>
        ))}
      </svg>
    </div>
  )
}

function timeMarks(from: number, to: number): number[] {
  const inside = TIME_MARKS.filter((hours) => hours >= from && hours <= to)
  if (inside.length >= 2) return inside
  const step = roundStep(to - from, 4)
  return Array.from(
    { length: Math.floor(to / step) - Math.ceil(from / step) + 1 },
    (_, i) => (Math.ceil(from / step) + i) * step,
  )
}

function timeText(hours: number): string {
  return hours < 96 ? `${hours} h` : `${Math.round(hours / 24)} d`
}

function pictureWords(rows: readonly BakeOptionRow[]): string {
  const coolest = rows[0]
  const hottest = rows.at(-1)
  if (coolest === undefined || hottest === undefined) return ''
  const said = ({ celsius, totalHours, energyKWh }: BakeOptionRow) =>
    `${celsius} °C takes ${hoursText(totalHours)} and ${energyText(energyKWh)}`
  if (coolest === hottest) return `One bake: ${said(coolest)}.`
  return `${rows.length} bakes, temperature against total time. The coolest, ${said(coolest)}; the hottest, ${said(hottest)}. A larger disc means more energy.`
}
