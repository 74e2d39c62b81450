/**
 * The tube to scale, with the pressure along it on a log axis above. One column a segment, each a link. What a colour
 * says, a shape or a word says too: over target is a diamond, old is hollow, hot is hatched, gas inside is striped.
 */
import { useId } from 'react'
import { Link } from 'react-router'
import type { PressureUnit } from '#app/context.ts'
import { SEGMENT_STATES } from '#app/domain/segment-states.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { fromPascal } from '#app/physics/units.ts'
import { chainageScale, decadesAround, decadeTicks, roundStep } from './scales.ts'
import {
  axisValues,
  drawnReadings,
  isOverTarget,
  permitWords,
  pumpWords,
  type StripLine,
  type StripSegment,
  segmentWords,
} from './strip.ts'
import { fillFor, StripKeys, StripPatterns } from './strip-patterns.tsx'

const WIDTH = 1160
const LEFT = 58
const RIGHT = 14
const TOP = 16
const PLOT = 236
const TUBE_TOP = TOP + PLOT + 12
const TUBE = 12
const TAG_Y = TUBE_TOP + TUBE + 26
const AXIS_Y = TAG_Y + 24
const HEIGHT = AXIS_Y + 10

interface Scene {
  unit: PressureUnit
  patterns: string
  x: (code: string, chainageM: number) => number
  y: (pa: number) => number
  top: number
}

/**
 * Pressure along the tube, with its keys. The table of segments on the same page holds the same in figures.
 *
 * @param summary the drawing in a few sentences, for readers who do not see it
 * @param hrefFor address of a segment's page
 */
export function LineStrip({
  lines,
  segments,
  summary,
  hrefFor,
}: {
  lines: readonly StripLine[]
  segments: readonly StripSegment[]
  summary: string
  hrefFor: (tag: string) => string
}) {
  const { unit } = useSite()
  const patterns = useId()
  const decades = decadesAround(axisValues(segments).map((pa) => fromPascal(pa, unit)))
  const scale = chainageScale(lines, WIDTH - LEFT - RIGHT)
  const scene: Scene = {
    unit,
    patterns,
    top: decades.high,
    x: (code, chainageM) => LEFT + (scale.place(code, chainageM) ?? 0),
    y: (pa) => {
      const share = (Math.log10(fromPascal(pa, unit)) - decades.low) / (decades.high - decades.low)
      return TOP + PLOT * (1 - Math.min(1, Math.max(0, share)))
    },
  }
  const drawn = segments.filter(({ lineCode }) => scale.place(lineCode, 0) !== null)
  return (
    <figure>
      <figcaption className="sr-only">{summary}</figcaption>
      <StripKeys />
      {/* biome-ignore lint/a11y/useSemanticElements: a fieldset groups controls; this groups a drawing that scrolls */}
      <div
        role="group"
        aria-label="The tube, by chainage"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: without it the keyboard could not scroll the drawing
        tabIndex={0}
        className="overflow-x-auto print:overflow-visible"
      >
        {/* biome-ignore lint/a11y/noSvgWithoutTitle: the caption is its title, and the links inside have names */}
        <svg viewBox={`0 0 ${WIDTH} ${HEIGHT}`} className="block h-auto w-full min-w-[58rem] print:min-w-0">
          <StripPatterns id={patterns} />
          {/* biome-ignore lint/a11y/noAriaHiddenOnFocusable: a group of shapes takes no focus */}
          <g aria-hidden="true">
            <PressureAxis decades={decades} unit={unit} />
            {drawn.map((segment) => (
              <SegmentBand key={segment.tag} segment={segment} scene={scene} />
            ))}
            {drawn.map((segment) => (
              <SegmentPressure key={segment.tag} segment={segment} scene={scene} />
            ))}
            {lines.map((line) => (
              <ChainageAxis key={line.code} line={line} x={scene.x} main={line === lines[0]} />
            ))}
          </g>
          {drawn.map((segment) => (
            <SegmentLink key={segment.tag} segment={segment} scene={scene} to={hrefFor(segment.tag)} />
          ))}
        </svg>
      </div>
    </figure>
  )
}

function PressureAxis({ decades, unit }: { decades: { low: number; high: number }; unit: PressureUnit }) {
  const ticks = decadeTicks(decades)
  return (
    <>
      <text x={LEFT - 8} y={TOP - 5} textAnchor="end" className="fill-ink-3 text-xs">
        {unit}
      </text>
      {ticks.map((exponent) => {
        const y = TOP + (PLOT * (decades.high - exponent)) / (decades.high - decades.low)
        return (
          <g key={exponent}>
            <line x1={LEFT} x2={WIDTH - RIGHT} y1={y} y2={y} className="stroke-rule-2" />
            {exponent < decades.high && (
              <text x={LEFT - 8} y={y + 4} textAnchor="end" className="fill-ink-3 text-xs">
                10
                <tspan dy="-4" fontSize="9">
                  {String(exponent).replace('-', '−')}
                </tspan>
              </text>
            )}
          </g>
        )
      })}
    </>
  )
}

function SegmentBand({ segment, scene }: { segment: StripSegment; scene: Scene }) {
  const [x1, x2] = [scene.x(segment.lineCode, segment.startM), scene.x(segment.lineCode, segment.endM)]
  const { hot, highVacuum, label } = SEGMENT_STATES[segment.state]
  const fill = fillFor(segment.state, scene.patterns)
  const middle = (x1 + x2) / 2
  const silent = highVacuum && drawnReadings(segment).length === 0
  return (
    <>
      {fill !== null && (
        <rect x={x1} y={TOP} width={x2 - x1} height={PLOT} fill={fill} opacity={hot ? 0.7 : 1} />
      )}
      <path
        d={`M${x1} ${TOP}V${TUBE_TOP + TUBE}M${x2} ${TOP}V${TUBE_TOP + TUBE}`}
        className="stroke-rule"
        strokeWidth="1.5"
      />
      <rect
        x={x1}
        y={TUBE_TOP}
        width={x2 - x1}
        height={TUBE}
        fill={fill ?? undefined}
        className={fill === null ? 'fill-rule-2 stroke-edge' : 'stroke-edge'}
      />
      {/* Gate valves stand at both ends of a segment. */}
      {[x1, x2].map((x) => (
        <path
          key={x}
          d={`M${x - 4} ${TUBE_TOP - 3}L${x + 4} ${TUBE_TOP + TUBE + 3}V${TUBE_TOP - 3}L${x - 4} ${TUBE_TOP + TUBE + 3}Z`}
          className="fill-sheet stroke-ink-2"
        />
      ))}
      {(segment.permits ?? []).map((permit, i) => (
        <text
          key={permit.number}
          transform={`translate(${x1 + 13 + 14 * i} ${TOP + PLOT - 10}) rotate(-90)`}
          className="fill-heat text-xs font-semibold"
        >
          {permitWords(permit)}
        </text>
      ))}
      {(!highVacuum || silent) && (
        <text
          transform={`translate(${middle + 4} ${TOP + PLOT - 10}) rotate(-90)`}
          className="fill-ink-2 text-xs"
        >
          {highVacuum ? 'no reading' : label.toLowerCase()}
        </text>
      )}
    </>
  )
}

function SegmentPressure({ segment, scene }: { segment: StripSegment; scene: Scene }) {
  const [x1, x2] = [scene.x(segment.lineCode, segment.startM), scene.x(segment.lineCode, segment.endM)]
  // The target is a target of vacuum; across gas it would only look like a reading.
  const target = SEGMENT_STATES[segment.state].highVacuum ? segment.targetPa : null
  const path = (segment.predicted ?? [])
    .map(({ offsetM, pa }, step) => {
      const x = scene.x(segment.lineCode, segment.startM + offsetM)
      return `${step === 0 ? 'M' : 'L'}${x.toFixed(1)} ${scene.y(pa).toFixed(1)}`
    })
    .join('')
  return (
    <>
      {target !== null && (
        <path
          d={`M${x1 + 2} ${scene.y(target)}H${x2 - 2}`}
          className="stroke-ink-3"
          strokeWidth="1.5"
          strokeDasharray="4 3"
        />
      )}
      {path !== '' && <path d={path} fill="none" className="stroke-vac" strokeWidth="2" />}
      {drawnReadings(segment).map((gauge) => (
        <GaugeDot key={gauge.tag} gauge={gauge} segment={segment} scene={scene} />
      ))}
    </>
  )
}

function GaugeDot({
  gauge,
  segment,
  scene,
}: {
  gauge: ReturnType<typeof drawnReadings>[number]
  segment: StripSegment
  scene: Scene
}) {
  const x = scene.x(segment.lineCode, gauge.chainageM)
  const y = scene.y(gauge.pa)
  if (Math.log10(fromPascal(gauge.pa, scene.unit)) > scene.top) {
    // Beyond the axis: an arrowhead at its upper edge, not a dot at a height that means something else.
    return <path d={`M${x - 5} ${TOP + 9}h10l-5 -8z`} className="fill-ink" />
  }
  if (!gauge.fresh)
    return <circle cx={x} cy={y} r="3.75" className="fill-sheet stroke-ink-2" strokeWidth="1.8" />
  if (isOverTarget(segment, gauge))
    return <path d={`M${x} ${y - 6}l5.5 6l-5.5 6l-5.5 -6z`} className="fill-warn stroke-sheet" />
  return <circle cx={x} cy={y} r="4" className="fill-ink stroke-sheet" strokeWidth="1.5" />
}

function ChainageAxis({ line, x, main }: { line: StripLine; x: Scene['x']; main: boolean }) {
  const step = roundStep(line.lengthM, main ? 6 : 1)
  const ticks = main
    ? Array.from({ length: Math.floor(line.lengthM / step) + 1 }, (_, index) => index * step)
    : [line.lengthM]
  return (
    <>
      {ticks.map((metres) => (
        <text
          key={metres}
          x={x(line.code, metres)}
          y={AXIS_Y}
          textAnchor={metres === 0 ? 'start' : metres === line.lengthM ? 'end' : 'middle'}
          className="fill-ink-3 text-xs"
        >
          {metres} m
        </text>
      ))}
    </>
  )
}

/** Hangs below the tube where the pump sits; inside the link, so that it can be pointed at and is no hole in it. */
function PumpMark({
  pump,
  segment,
  scene,
}: {
  pump: StripSegment['pumps'][number]
  segment: StripSegment
  scene: Scene
}) {
  const x = scene.x(segment.lineCode, pump.chainageM)
  const y = TUBE_TOP + TUBE
  const mobile = pump.kind !== 'getter-ion'
  return (
    <path
      d={`M${x} ${y}v3M${x - 3.5} ${y + 3}h7v6h-7z`}
      className={mobile ? 'fill-sheet stroke-ink-2' : 'fill-ink-2 stroke-ink-2'}
    >
      <title>{pumpWords(pump)}</title>
    </path>
  )
}

function SegmentLink({ segment, scene, to }: { segment: StripSegment; scene: Scene; to: string }) {
  const [x1, x2] = [scene.x(segment.lineCode, segment.startM), scene.x(segment.lineCode, segment.endM)]
  const plain = segment.state === 'in-service'
  return (
    <Link to={to} aria-label={segmentWords(segment, scene.unit)} className="group">
      <rect
        x={x1}
        y={TOP}
        width={x2 - x1}
        height={TAG_Y + 6 - TOP}
        className="fill-transparent group-hover:fill-ink/5 group-focus-visible:fill-ink/10"
      />
      {segment.pumps.map((pump) => (
        <PumpMark key={pump.tag} pump={pump} segment={segment} scene={scene} />
      ))}
      <text
        x={(x1 + x2) / 2}
        y={TAG_Y}
        textAnchor="middle"
        className={`text-sm group-hover:underline ${plain ? 'fill-ink-2' : 'fill-ink font-semibold'}`}
      >
        {segment.tag}
      </text>
    </Link>
  )
}
