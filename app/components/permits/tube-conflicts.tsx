/**
 * Heated segments on the tube, to scale, with the exclusion on both sides and what comes into it. Places are shares of
 * the width, so that words keep their size on a narrow screen; each kind of stretch has lines of its own, so that it can
 * be told without colour.
 */
import { useId } from 'react'

interface Along {
  line: string
  fromM: number
  toM: number
}

export interface HeatedStretch extends Along {
  tag: string
  /** Metres that nobody enters beyond both ends. */
  westM: number
  eastM: number
}

export interface MarkedStretch extends Along {
  key: string
  label: string
  look: 'block' | 'ruling' | 'warning' | 'asked' | 'left'
}

const LOOK_WORDS: Record<MarkedStretch['look'], string> = {
  block: 'blocks',
  ruling: 'waits for a ruling, or is ruled on',
  warning: 'to be known',
  asked: 'asked for',
  left: 'left by the officer',
}

/** Tags stand in a row of their own, so that those of a pair do not run into the metres on a narrow screen. */
const TUBE_TOP = 38
const TAG_Y = 13
const TUBE = 18
const FIRST_ROW = TUBE_TOP + TUBE + 26
const ROW = 36
const BAR = 12
/** Metres drawn beyond the exclusion, at the least and as a share of it. */
const MARGIN_M = 15
const MARGIN_SHARE = 0.12

function metres(value: number): string {
  return `${Math.round(value * 10) / 10} m`
}

function range({ fromM, toM }: Pick<Along, 'fromM' | 'toM'>): string {
  return fromM === toM ? `at ${metres(fromM)}` : `${Math.round(fromM * 10) / 10} to ${metres(toM)}`
}

/** One drawing for each line that has a heated segment; nothing where none has. */
export function TubeConflicts({
  heated,
  marked,
}: {
  heated: readonly HeatedStretch[]
  marked: readonly MarkedStretch[]
}) {
  const lines = [...new Set(heated.map(({ line }) => line))]
  const elsewhere = marked.filter(({ line }) => !lines.includes(line))
  return (
    <>
      {lines.map((line) => (
        <Strip
          key={line}
          heated={heated.filter((one) => one.line === line)}
          marked={marked.filter((one) => one.line === line)}
        />
      ))}
      {elsewhere.map((one) => (
        <p key={one.key} className="mt-1 text-sm text-ink-2">
          On another line, {one.line}, {range(one)}: {one.label}
        </p>
      ))}
    </>
  )
}

function Strip({ heated, marked }: { heated: readonly HeatedStretch[]; marked: readonly MarkedStretch[] }) {
  const id = useId()
  const zone = {
    fromM: Math.max(0, Math.min(...heated.map(({ fromM, westM }) => fromM - westM))),
    toM: Math.max(...heated.map(({ toM, eastM }) => toM + eastM)),
  }
  const margin = Math.max(MARGIN_M, (zone.toM - zone.fromM) * MARGIN_SHARE)
  const low = Math.max(0, zone.fromM - margin)
  const high = zone.toM + margin
  const share = (m: number) => ((Math.min(high, Math.max(low, m)) - low) / (high - low)) * 100
  const at = (m: number) => `${share(m).toFixed(2)}%`
  const wide = (fromM: number, toM: number) => `${Math.max(0, share(toM) - share(fromM)).toFixed(2)}%`
  const shown = marked.filter(({ fromM, toM }) => toM >= low && fromM <= high)
  const height = FIRST_ROW + shown.length * ROW + 4
  const looks = [...new Set(shown.map(({ look }) => look))]
  return (
    <figure className="unbroken mb-3">
      <figcaption className="sr-only">
        {heated
          .map(
            (one) =>
              `${one.tag} is heated, ${range(one)}; nobody enters ${range({ fromM: Math.max(0, one.fromM - one.westM), toM: one.toM + one.eastM })}.`,
          )
          .join(' ')}{' '}
        {shown.map((one) => `${one.label}: ${range(one)}, ${LOOK_WORDS[one.look]}.`).join(' ')}
      </figcaption>
      <svg width="100%" height={height} className="block overflow-visible" aria-hidden="true">
        <Patterns id={id} />
        {heated.map(({ tag, fromM, toM, westM, eastM }) => (
          <rect
            key={tag}
            x={at(fromM - westM)}
            y={TUBE_TOP - 4}
            width={wide(fromM - westM, toM + eastM)}
            height={height - TUBE_TOP}
            className="fill-rule-2"
          />
        ))}
        <rect x="0%" y={TUBE_TOP} width="100%" height={TUBE} className="fill-sheet stroke-edge" />
        {heated.map(({ tag, fromM, toM, westM, eastM }) => (
          <rect
            key={tag}
            x={at(fromM - westM)}
            y={TUBE_TOP}
            width={wide(fromM - westM, toM + eastM)}
            height={TUBE}
            fill={`url(#${id}-exclusion)`}
          />
        ))}
        {heated.map(({ tag, fromM, toM }) => (
          <g key={tag}>
            <rect
              x={at(fromM)}
              y={TUBE_TOP}
              width={wide(fromM, toM)}
              height={TUBE}
              fill={`url(#${id}-hot)`}
              className="stroke-heat"
            />
            <text
              x={at((fromM + toM) / 2)}
              y={TAG_Y}
              textAnchor="middle"
              className="fill-ink text-sm font-semibold"
            >
              {tag}
            </text>
            <text x={at(fromM)} y={TUBE_TOP - 9} className="fill-ink-2 text-xs">
              {metres(fromM)}
            </text>
            {/* Where the next segment begins, its own beginning says it. */}
            {!heated.some((next) => next.fromM === toM) && (
              <text x={at(toM)} y={TUBE_TOP - 9} textAnchor="end" className="fill-ink-2 text-xs">
                {metres(toM)}
              </text>
            )}
          </g>
        ))}
        {[zone.fromM, zone.toM].map((edge, index) => (
          <g key={edge}>
            <line
              x1={at(edge)}
              x2={at(edge)}
              y1={TUBE_TOP - 4}
              y2={height}
              className="stroke-ink-2"
              strokeDasharray="5 3"
            />
            <text
              x={at(edge)}
              dx={index === 0 ? 4 : -4}
              y={TUBE_TOP + TUBE + 15}
              textAnchor={index === 0 ? 'start' : 'end'}
              className="fill-ink-2 text-xs"
            >
              {index === 0 ? `no entry from ${metres(edge)}` : `to ${metres(edge)}`}
            </text>
          </g>
        ))}
        {shown.map((one, index) => (
          <Row key={one.key} one={one} y={FIRST_ROW + index * ROW} id={id} at={at} wide={wide} />
        ))}
      </svg>
      <ul className="mt-1 flex flex-wrap gap-x-4 gap-y-1 text-sm text-ink-2">
        <Key fill={`url(#${id}-hot)`}>heated</Key>
        <Key fill={`url(#${id}-exclusion)`}>no entry</Key>
        {looks.map((look) => (
          <Key key={look} fill={`url(#${id}-${look})`}>
            {LOOK_WORDS[look]}
          </Key>
        ))}
      </ul>
    </figure>
  )
}

function Row({
  one,
  y,
  id,
  at,
  wide,
}: {
  one: MarkedStretch
  y: number
  id: string
  at: (m: number) => string
  wide: (fromM: number, toM: number) => string
}) {
  const point = one.fromM === one.toM
  return (
    <g>
      <text x="0" y={y + 11} className="fill-ink stroke-sheet text-xs" strokeWidth="3" paintOrder="stroke">
        {one.label}, {range(one)}
      </text>
      {point ? (
        <line
          x1={at(one.fromM)}
          x2={at(one.fromM)}
          y1={y + 14}
          y2={y + 16 + BAR}
          className="stroke-ink"
          strokeWidth="4"
        />
      ) : (
        <rect
          x={at(one.fromM)}
          y={y + 15}
          width={wide(one.fromM, one.toM)}
          height={BAR}
          fill={`url(#${id}-${one.look})`}
          className="stroke-ink-2"
        />
      )}
    </g>
  )
}

function Key({ fill, children }: { fill: string; children: React.ReactNode }) {
  return (
    <li className="flex items-center gap-1.5">
      <svg width="20" height="12" aria-hidden="true" className="shrink-0">
        <rect x="0.5" y="0.5" width="19" height="11" fill={fill} className="stroke-ink-2" />
      </svg>
      {children}
    </li>
  )
}

/** Slant, spacing and weight of the lines differ, and the colours only help. */
function Patterns({ id }: { id: string }) {
  return (
    <defs>
      <pattern
        id={`${id}-hot`}
        width="6"
        height="6"
        patternUnits="userSpaceOnUse"
        patternTransform="rotate(45)"
      >
        <rect width="6" height="6" className="fill-heat-soft" />
        <rect width="2.4" height="6" className="fill-heat" />
      </pattern>
      <pattern id={`${id}-exclusion`} width="6" height="6" patternUnits="userSpaceOnUse">
        <rect width="6" height="6" className="fill-sheet" />
        <circle cx="2" cy="2" r="1.1" className="fill-heat" />
      </pattern>
      <pattern id={`${id}-block`} width="7" height="7" patternUnits="userSpaceOnUse">
        <rect width="7" height="7" className="fill-sheet" />
        <path d="M0 0l7 7M7 0l-7 7" className="stroke-bad" strokeWidth="1.4" />
      </pattern>
      <pattern
        id={`${id}-ruling`}
        width="6"
        height="6"
        patternUnits="userSpaceOnUse"
        patternTransform="rotate(-45)"
      >
        <rect width="6" height="6" className="fill-warn-soft" />
        <rect width="1.4" height="6" className="fill-warn" />
      </pattern>
      <pattern id={`${id}-warning`} width="6" height="4" patternUnits="userSpaceOnUse">
        <rect width="6" height="4" className="fill-sheet" />
        <rect width="6" height="1" className="fill-ink-2" />
      </pattern>
      <pattern id={`${id}-asked`} width="5" height="6" patternUnits="userSpaceOnUse">
        <rect width="5" height="6" className="fill-sheet" />
        <rect width="1" height="6" className="fill-ink-2" />
      </pattern>
      <pattern id={`${id}-left`} width="6" height="6" patternUnits="userSpaceOnUse">
        <rect width="6" height="6" className="fill-vac-soft" />
      </pattern>
    </defs>
  )
}
