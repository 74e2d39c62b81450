/**
 * What the temperature and power loggers of the demo post every five minutes while a heated-segment permit is live:
 * thermocouples of the heated segments, and volts and amps of the supplies that heat them. Every row follows from its
 * instant alone, so that the same stretch of time gives the same posts whenever it is asked for.
 */
import { at } from '../demo-time.ts'

import { NIGHT_END_MS } from '../readings/morning.ts'
import { isoWithOffset } from '../readings/site-clock.ts'
import { supplyOutput } from '../readings/supplies.ts'
import { OPEN_WIRE_C, THERMOCOUPLES, type Thermocouple, thermocoupleC } from '../readings/temperatures.ts'
import { tunnelAirC } from '../readings/tunnel-air.ts'

const HOUR_MS = 3_600_000
const STEP_MS = 300_000

/** The loggers that post, each with a source of its name. */
export const FED_SOURCES = ['NL-T', 'NL-P'] as const
export type FedSource = (typeof FED_SOURCES)[number]

interface Heating {
  segment: string
  supply: 'HX-1' | 'HX-2'
  /** End of the soak as planned; null where heating was off before the demo began. */
  offMs: number | null
  /** End of the permit: nothing is posted afterwards. */
  untilMs: number
}

const HEATINGS: readonly Heating[] = [
  { segment: 'SG-08', supply: 'HX-2', offMs: null, untilMs: at('2026-11-10 18:00').getTime() },
  {
    segment: 'SG-05',
    supply: 'HX-1',
    offMs: at('2026-11-12 09:12').getTime(),
    untilMs: at('2026-11-13 18:00').getTime(),
  },
]

/** As fast as SG-08 cooled before it (seeds/readings/wall-temperature.ts), h. */
const COOLING_TAU_H = 7.74

/** A reading as the API takes it. */
export interface FedReading {
  channel: string
  /** RFC 3339. */
  at: string
  value: number | string
  unit?: string
}

/** Instants at which the loggers have a row to post, after one instant and up to another (ms since 1970 UTC), at most `most`. */
export function feedInstants(afterMs: number, toMs: number, most: number): number[] {
  const last = Math.min(toMs, Math.max(...HEATINGS.map(({ untilMs }) => untilMs)))
  const instants: number[] = []
  // The night's files hold what was before.
  const first = (Math.floor(Math.max(afterMs, NIGHT_END_MS) / STEP_MS) + 1) * STEP_MS
  for (let atMs = first; atMs <= last && instants.length < most; atMs += STEP_MS) instants.push(atMs)
  return instants
}

/** Readings of a logger at an instant; none once no permit is live. */
export function feedReadings(source: FedSource, atMs: number): FedReading[] {
  const live = HEATINGS.filter(({ untilMs }) => atMs <= untilMs)
  return live.flatMap((heating) =>
    source === 'NL-T' ? temperatures(heating, atMs) : supplyMeters(heating, atMs),
  )
}

function temperatures(heating: Heating, atMs: number): FedReading[] {
  return THERMOCOUPLES.filter(({ segment }) => segment === heating.segment).map((one) => ({
    channel: one.tag,
    at: isoWithOffset(atMs),
    value: celsius(one, heating, atMs),
    unit: '°C',
  }))
}

function celsius(one: Thermocouple, { offMs }: Heating, atMs: number): number {
  if (offMs === null || atMs <= offMs) return thermocoupleC(one, atMs)
  const hot = thermocoupleC(one, offMs)
  if (hot === OPEN_WIRE_C) return hot
  const air = tunnelAirC(atMs)
  const left = Math.exp(-(atMs - offMs) / (COOLING_TAU_H * HOUR_MS))
  return Math.round((air + (hot - tunnelAirC(offMs)) * left) * 10) / 10
}

function supplyMeters({ supply, offMs }: Heating, atMs: number): FedReading[] {
  const output = offMs !== null && atMs > offMs ? null : supplyOutput(supply, atMs)
  const shared = { at: isoWithOffset(atMs) }
  return [
    { channel: `${supply}-U`, ...shared, value: output?.volts ?? 'OFF', unit: 'V' },
    { channel: `${supply}-I`, ...shared, value: output?.amps ?? 'OFF', unit: 'A' },
  ]
}
