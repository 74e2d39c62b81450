/**
 * Pressures against time on a log axis: the drawing, a read-out that the keyboard moves, the course in words, the
 * figures as a table, and all of them as a file. The drawing needs a script; everything else does without.
 */
import { memo, useCallback, useDeferredValue, useMemo, useState } from 'react'
import { usePalette } from '#app/hooks/use-palette.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { fromPascal, toPascal } from '#app/physics/units.ts'
import { pressureWords } from '../ui/format-pressure.ts'
import { siteTimeText } from '../ui/site-time.ts'
import { alignSeries, axisValuesOf, type Cell, type ChartSeries, cellNear, extremesOf } from './chart-data.ts'
import { ChartKeys } from './chart-keys.tsx'
import { ChartMarks, ChartTable, ChartWords } from './chart-words.tsx'
import { decadesAround, decadeTicks } from './scales.ts'
import { type ChartKind, UplotCanvas } from './uplot.tsx'

/** From atmosphere to the best of vacua; only a reading gone astray would need more. */
const MOST_DECADES = 15

/**
 * @param x places of the curves: ms since 1970 UTC for `time`, hours for `hours`
 * @param xLog begins with the hours on a log axis; the reader may change it
 * @param levels pressures that matter, drawn dashed
 * @param marks events, drawn dotted and numbered
 * @param caption what the chart shows, for readers who do not see it
 * @param csvHref address of the readings as a file
 */
export function PressureChart({
  x,
  kind,
  xLog = false,
  series,
  levels = [],
  marks = [],
  now,
  caption,
  csvHref,
}: {
  x: readonly number[]
  kind: ChartKind
  xLog?: boolean
  series: readonly ChartSeries[]
  levels?: readonly { pa: number; label: string }[]
  marks?: readonly { x: number; text: string }[]
  now?: number
  caption: string
  csvHref?: string
}) {
  const { unit, zone } = useSite()
  const palette = usePalette()
  // What only a script can work is not offered before there is one.
  const alive = palette !== null
  const [logTime, setLogTime] = useState(xLog)
  const [cursor, setCursor] = useState<number | null>(null)
  const isLog = kind === 'hours' && logTime
  // A chart is made anew when its data or its axes change, and only then; moving the read-out must not do it.
  const key = JSON.stringify([x, series, levels, marks, now, unit, isLog])
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key stands for all of them by value
  const drawn = useMemo(() => {
    const aligned = alignSeries(x, series, isLog)
    const values = axisValuesOf(
      aligned,
      levels.map(({ pa }) => pa),
    )
    const decades = decadeTicks(
      decadesAround(
        values.map((pa) => fromPascal(pa, unit)),
        MOST_DECADES,
      ),
    )
    return {
      aligned,
      decades: decades.map((exponent) => ({ exponent, value: toPascal(10 ** exponent, unit) })),
      levels: levels.map(({ pa, label }) => ({ value: pa, label })),
      marks: marks.map((mark) => mark.x),
      now: now ?? null,
    }
  }, [key])
  const { aligned } = drawn
  // The figures follow when there is time: under a moving hand, hundreds of cells would hold the drawing up.
  const settled = useDeferredValue(aligned)
  const placeText = useCallback(
    (place: number) =>
      kind === 'time' ? siteTimeText(new Date(place), zone) : `${place.toFixed(place < 10 ? 2 : 1)} h`,
    [kind, zone],
  )
  const spoken = (cell: Cell) => (cell === null || cell === undefined ? 'none' : pressureWords(cell, unit))

  if (aligned.columns.every((column) => extremesOf(aligned.x, column) === null)) {
    return <p className="py-2 text-ink-2">There is no reading to draw in this stretch of time.</p>
  }
  return (
    <figure>
      <figcaption className="sr-only">{caption}</figcaption>
      <div className="mb-1 flex flex-wrap items-center justify-between gap-x-4 gap-y-2">
        <ChartKeys aligned={aligned} cursor={cursor} />
        {kind === 'hours' && alive && <TimeAxisSwitch log={logTime} onChange={setLogTime} />}
      </div>
      <div className="min-h-85">
        {palette === null ? (
          <noscript>
            <p className="text-ink-2">
              Without a script there is no drawing here: the table below holds the curve.
            </p>
          </noscript>
        ) : (
          <UplotCanvas
            {...drawn}
            kind={kind}
            xLog={isLog}
            zone={zone}
            unit={unit}
            palette={palette}
            cursor={cursor}
            onCursor={setCursor}
          />
        )}
      </div>
      <ReadOut
        alive={alive}
        count={aligned.x.length}
        cursor={cursor}
        onCursor={setCursor}
        words={(at) =>
          [
            placeText(aligned.x[at] ?? 0),
            ...aligned.columns.map((column) => `${column.label} ${spoken(cellNear(aligned.x, column, at))}`),
          ].join('; ')
        }
        place={cursor === null ? null : placeText(aligned.x[cursor] ?? 0)}
      />
      <ChartMarks marks={marks} placeText={placeText} />
      <ChartWords aligned={aligned} levels={levels} placeText={placeText} />
      <SettledTable
        aligned={settled}
        caption={caption}
        placeHead={kind === 'time' ? 'Time' : 'Hours'}
        placeText={placeText}
        csvHref={csvHref}
      />
    </figure>
  )
}

const SettledTable = memo(ChartTable)

/** A slider along the curves: arrow keys, a finger or a mouse move the read-out without touching the drawing. */
function ReadOut({
  alive,
  count,
  cursor,
  onCursor,
  words,
  place,
}: {
  alive: boolean
  count: number
  cursor: number | null
  onCursor: (at: number) => void
  words: (at: number) => string
  place: string | null
}) {
  const at = cursor ?? count - 1
  return (
    <label
      className={`mb-2 flex items-center gap-3 text-sm text-ink-2 print:hidden ${alive ? '' : 'invisible'}`}
    >
      <span className="shrink-0">Read at</span>
      <input
        type="range"
        min={0}
        max={count - 1}
        value={at}
        aria-valuetext={words(at)}
        onChange={(event) => onCursor(Number(event.target.value))}
        className="h-6 min-w-0 flex-1 accent-ink pointer-coarse:h-11"
      />
      <span className="w-36 shrink-0 text-ink">{place ?? 'the end'}</span>
    </label>
  )
}

function TimeAxisSwitch({ log, onChange }: { log: boolean; onChange: (log: boolean) => void }) {
  return (
    <fieldset className="flex overflow-hidden rounded-md border text-sm print:hidden">
      <legend className="sr-only">Axis of time</legend>
      {[false, true].map((choice) => (
        <button
          key={String(choice)}
          type="button"
          aria-pressed={choice === log}
          onClick={() => onChange(choice)}
          className="min-h-8 border-l px-2.5 text-ink-2 first-of-type:border-l-0 hover:bg-rule-2 focus-visible:-outline-offset-2 aria-pressed:bg-ink aria-pressed:text-sheet pointer-coarse:min-h-11"
        >
          {choice ? 'log hours' : 'even hours'}
        </button>
      ))}
    </fieldset>
  )
}
