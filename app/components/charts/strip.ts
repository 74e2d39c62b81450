/** What the drawing of the tube says, in words and in choices, apart from how it is drawn. */
import type { PressureUnit } from '#app/context.ts'
import { PERMIT_STATE_LABELS, type PermitState } from '#app/domain/permit-words.ts'
import { PUMP_KIND_LABELS, type PumpKind } from '#app/domain/register.ts'
import { SEGMENT_STATES, type SegmentState } from '#app/domain/segment-states.ts'
import { pressureWords } from '../ui/format-pressure.ts'

export interface StripLine {
  code: string
  name: string
  lengthM: number
}

interface StripGauge {
  tag: string
  kind: string
  /** Metres along its line. */
  chainageM: number
  /** Pa; null for none. */
  value: number | null
  fresh: boolean
}

interface StripPump {
  tag: string
  kind: PumpKind
  /** Metres along its line. */
  chainageM: number
}

export interface StripSegment {
  tag: string
  lineCode: string
  startM: number
  endM: number
  state: SegmentState
  targetPa: number | null
  gauges: readonly StripGauge[]
  /** Pumps at work on it. */
  pumps: readonly StripPump[]
  /** Expected pressure by metres from the segment's start; null without a model for this state. */
  predicted: readonly { offsetM: number; pa: number }[] | null
  /** Permits at the site there; null where nothing is known of permits. */
  permits: readonly { number: string; state: PermitState }[] | null
}

interface Drawn {
  tag: string
  chainageM: number
  pa: number
  fresh: boolean
}

/**
 * Readings that have a place on the pressure axis. Outside high vacuum the ionisation gauges are off, and under it a
 * thermal-conductivity gauge stands at its floor and says nothing.
 */
export function drawnReadings({ state, gauges }: StripSegment): Drawn[] {
  if (!SEGMENT_STATES[state].highVacuum) return []
  return gauges.flatMap(({ tag, kind, chainageM, value, fresh }) =>
    kind === 'thermal-conductivity' || value === null || value <= 0
      ? []
      : [{ tag, chainageM, pa: value, fresh }],
  )
}

/** What sets the pressure axis: targets, and readings and expectations under high vacuum. */
export function axisValues(segments: readonly StripSegment[]): number[] {
  return segments.flatMap((segment) => [
    ...(segment.targetPa === null ? [] : [segment.targetPa]),
    ...drawnReadings(segment).map(({ pa }) => pa),
    ...(SEGMENT_STATES[segment.state].highVacuum ? (segment.predicted ?? []).map(({ pa }) => pa) : []),
  ])
}

/** Whether a fresh reading stands over the target, which applies in service alone. */
export function isOverTarget({ state, targetPa }: StripSegment, reading: Drawn): boolean {
  return reading.fresh && state === 'in-service' && targetPa !== null && reading.pa > targetPa
}

/** A permit as it is named beside its mark. */
export function permitWords({ number, state }: { number: string; state: PermitState }): string {
  return `permit ${number}, ${PERMIT_STATE_LABELS[state].toLowerCase()}`
}

/** A pump as it is named beside its mark. */
export function pumpWords({ tag, kind }: StripPump): string {
  return `${tag}, ${PUMP_KIND_LABELS[kind].toLowerCase()}`
}

/** A segment as it is read out: tag, state, each reading and each pump. */
export function segmentWords(segment: StripSegment, unit: PressureUnit): string {
  const readings = drawnReadings(segment).map(
    (reading) =>
      `${reading.tag} ${pressureWords(reading.pa, unit)}${reading.fresh ? '' : ', old'}${isOverTarget(segment, reading) ? ', over target' : ''}`,
  )
  return [
    segment.tag,
    SEGMENT_STATES[segment.state].label,
    ...(readings.length === 0 ? ['no reading'] : readings),
    ...segment.pumps.map((pump) => `pumped by ${pumpWords(pump)}`),
    ...(segment.permits ?? []).map(permitWords),
  ].join('; ')
}
