/**
 * What a plan asks for and what the model expects, in four strips over one time axis: temperature, power, pressure by gas,
 * stroke of the joints. Lines differ by dash as well as by colour; a table holds the same in figures.
 */
import type { BakePlanContent } from '#app/domain/bake-plan.ts'
import { PLAN_STEP_LABELS } from '#app/domain/bake-plan.ts'
import type { PlanPrediction } from '#app/domain/bake-plan-prediction.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { fromPascal } from '#app/physics/units.ts'
import { decadesAround, decadeTicks, roundStep } from '../charts/scales.ts'
import { raised } from '../ui/format-pressure.ts'
import { curvePath, type Scale } from './plan-paths.ts'

const WIDTH = 1000
const LEFT = 62
const RIGHT = 16
const STRIP = 132
const GAP = 34
const TOP = 46
const DECADES = 8

const LOOKS = [
  { stroke: 'stroke-ink', dash: '' },
  { stroke: 'stroke-vac', dash: '7 4' },
  { stroke: 'stroke-heat', dash: '2 3' },
  { stroke: 'stroke-ink-3', dash: '10 3 2 3' },
  { stroke: 'stroke-vac', dash: '' },
  { stroke: 'stroke-heat', dash: '7 4' },
] as const

interface Curve {
  label: string
  values: readonly (number | null)[]
}

interface Mark {
  label: string
  value: number
}

interface Strip {
  title: string
  curves: Curve[]
  marks: Mark[]
  log: boolean
}

export function PlanCurves({
  content,
  prediction,
}: {
  content: BakePlanContent
  prediction: PlanPrediction
}) {
  const { unit } = useSite()
  const { hours, segments, steps } = prediction
  const many = segments.length > 1
  const prefix = (tag: string) => (many ? `${tag} ` : '')
  const inUnit = (values: readonly number[]) => values.map((pa) => fromPascal(pa, unit))
  const pressures = segments.flatMap(({ tag, n2Pa, byGasPa }) => [
    { label: `${prefix(tag)}as a gauge reads it`, values: inUnit(n2Pa) },
    { label: `${prefix(tag)}water`, values: inUnit(byGasPa.H2O) },
    { label: `${prefix(tag)}hydrogen`, values: inUnit(byGasPa.H2) },
  ])
  const strips: Strip[] = [
    {
      title: 'Temperature, °C',
      curves: [
        { label: 'wall expected', values: prediction.wallC },
        { label: 'setpoint', values: prediction.setpointC },
      ],
      marks: [{ label: `touch limit ${content.coldC} °C`, value: content.coldC }],
      log: false,
    },
    {
      title: 'Power, kW, tube and blankets',
      curves: [{ label: 'power', values: prediction.powerKW }],
      marks: [],
      log: false,
    },
    {
      title: `Pressure, ${unit}, nitrogen-equivalent and by gas, at the end farther from the pump`,
      curves: pressures.filter(({ values }) => values.length > 0),
      marks: [
        { label: 'ramp waits', value: fromPascal(content.holdPa, unit) },
        { label: 'target', value: fromPascal(content.targetPa, unit) },
      ],
      log: true,
    },
    {
      title: 'Stroke of one joint, mm',
      curves: segments.map(({ tag, strokeMm }) => ({ label: `${prefix(tag)}stroke`, values: strokeMm })),
      marks: [{ label: 'rated', value: Math.min(...segments.map(({ ratedMm }) => ratedMm)) }],
      log: false,
    },
  ]
  const height = TOP + strips.length * (STRIP + GAP) + 12
  const endH = hours.at(-1) ?? 1
  const x = (hour: number) => LEFT + (hour / endH) * (WIDTH - LEFT - RIGHT)
  return (
    <figure>
      <figcaption className="mb-2 text-sm text-ink-2">{summaryOf(content, prediction)}</figcaption>
      {/* biome-ignore lint/a11y/useSemanticElements: a fieldset groups controls; this groups a drawing that scrolls */}
      <div
        role="group"
        aria-label="Curves of the plan over time"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: without it the keyboard could not scroll the drawing
        tabIndex={0}
        className="overflow-x-auto print:overflow-visible"
      >
        <svg
          viewBox={`0 0 ${WIDTH} ${height}`}
          className="block h-auto w-full min-w-[44rem] print:min-w-0"
          role="img"
        >
          <title>{summaryOf(content, prediction)}</title>
          {steps
            .filter(({ kind }) => kind !== 'preparation')
            .map(({ kind, fromH, toH }, i) => (
              <g key={kind}>
                <rect
                  x={x(fromH)}
                  y={TOP - 14}
                  width={Math.max(0, x(toH) - x(fromH))}
                  height={height - TOP - 8}
                  className={i % 2 === 0 ? 'fill-rule-2' : 'fill-sheet'}
                />
                <text x={x(fromH) + 3} y={i % 2 === 0 ? 12 : 24} className="fill-ink-2 text-xs">
                  {PLAN_STEP_LABELS[kind]}
                </text>
              </g>
            ))}
          {strips.map((strip, i) => (
            <StripView key={strip.title} strip={strip} hours={hours} x={x} top={TOP + i * (STRIP + GAP)} />
          ))}
          <HoursAxis endH={endH} x={x} y={height - 4} />
        </svg>
      </div>
      <Keys strips={strips} />
    </figure>
  )
}

function HoursAxis({ endH, x, y }: { endH: number; x: (hour: number) => number; y: number }) {
  const step = Math.max(24, roundStep(endH / 24, 9) * 24)
  const ticks = Array.from({ length: Math.floor(endH / step) + 1 }, (_, i) => i * step)
  return (
    <>
      {ticks.map((hour) => (
        <text key={hour} x={x(hour)} y={y} textAnchor="middle" className="fill-ink-3 text-xs">
          {hour === 0 ? 'heating on' : `day ${hour / 24}`}
        </text>
      ))}
    </>
  )
}

function StripView({
  strip,
  hours,
  x,
  top,
}: {
  strip: Strip
  hours: readonly number[]
  x: (hour: number) => number
  top: number
}) {
  const scale = scaleOf(strip, top)
  return (
    <g>
      <text x={LEFT} y={top - 8} className="fill-ink-2 text-xs font-medium">
        {strip.title}
      </text>
      {scale.ticks.map(({ value, label }) => (
        <g key={value}>
          <path d={`M${LEFT} ${scale.y(value)}H${WIDTH - RIGHT}`} className="stroke-rule" strokeWidth="1" />
          <text x={LEFT - 6} y={scale.y(value) + 4} textAnchor="end" className="fill-ink-3 text-xs">
            {label}
          </text>
        </g>
      ))}
      {strip.marks.map(({ label, value }) => (
        <g key={label}>
          <path
            d={`M${LEFT} ${scale.y(value)}H${WIDTH - RIGHT}`}
            className="stroke-warn"
            strokeWidth="1.2"
            strokeDasharray="1 4"
          />
          <text x={WIDTH - RIGHT} y={scale.y(value) - 3} textAnchor="end" className="fill-warn text-xs">
            {label}
          </text>
        </g>
      ))}
      {strip.curves.map(({ label, values }, i) => {
        const look = LOOKS[i % LOOKS.length] ?? LOOKS[0]
        return (
          <path
            key={label}
            d={curvePath(hours, values, x, scale.y)}
            fill="none"
            strokeWidth="1.7"
            strokeDasharray={look.dash}
            className={look.stroke}
          />
        )
      })}
    </g>
  )
}

function scaleOf({ curves, marks, log }: Strip, top: number): Scale {
  const known = [
    ...curves.flatMap(({ values }) => values.filter((value) => value !== null)),
    ...marks.map(({ value }) => value),
  ]
  if (log) {
    const decades = topDecades(known)
    const share = (value: number) =>
      (Math.log10(Math.max(value, 1e-30)) - decades.low) / (decades.high - decades.low)
    return {
      y: (value) => top + STRIP * (1 - Math.min(1, Math.max(0, share(value)))),
      ticks: decadeTicks(decades)
        .filter((_, i) => i % Math.ceil((decades.high - decades.low) / 4) === 0)
        .map((exponent) => ({ value: 10 ** exponent, label: `10${raised(exponent)}` })),
    }
  }
  const highest = Math.max(1, ...known)
  const step = roundStep(highest, 4)
  const high = Math.ceil(highest / step) * step
  return {
    y: (value) => top + STRIP * (1 - Math.min(1, Math.max(0, value / high))),
    ticks: Array.from({ length: Math.round(high / step) + 1 }, (_, i) => ({
      value: i * step,
      label: String(Number((i * step).toPrecision(4))),
    })),
  }
}

/** Decades from the highest value down: what lies below the last one is as good as nothing. */
function topDecades(values: readonly number[]): { low: number; high: number } {
  const { low, high } = decadesAround(values, 40)
  return { low: Math.max(low, high - DECADES), high }
}

function Keys({ strips }: { strips: readonly Strip[] }) {
  return (
    <ul className="mt-2 flex flex-wrap gap-x-5 gap-y-1 text-sm text-ink-2">
      {strips.flatMap(({ title, curves }) =>
        curves.length < 2
          ? []
          : curves.map(({ label }, i) => {
              const look = LOOKS[i % LOOKS.length] ?? LOOKS[0]
              return (
                <li key={`${title} ${label}`} className="flex items-center gap-1.5">
                  <svg viewBox="0 0 30 8" width="30" height="8" aria-hidden="true" className="shrink-0">
                    <path d="M0 4h30" strokeWidth="1.8" strokeDasharray={look.dash} className={look.stroke} />
                  </svg>
                  {label}
                </li>
              )
            }),
      )}
    </ul>
  )
}

function summaryOf(
  content: BakePlanContent,
  { peakKW, soakKW, energyKWh, segments }: PlanPrediction,
): string {
  const stroke = Math.max(...segments.flatMap(({ strokeMm }) => strokeMm))
  return `${content.segments.join(' + ')} at ${content.celsius} °C for ${content.soakHours} h: ${peakKW.toFixed(1)} kW at the end of the ramp, ${soakKW.toFixed(1)} kW in the soak, ${(energyKWh / 1000).toFixed(2)} MWh in all; joints move by ${stroke.toFixed(1)} mm.`
}
