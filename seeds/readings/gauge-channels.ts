/** What comes out of a gauge channel: the gauge that is wired to it, its noise, and the word it may say instead. */
import { at } from '../demo-time.ts'
import { SEGMENTS } from '../register/segments.ts'
import { NIGHT_END_MS, SG15_LAST } from './morning.ts'
import { pressureNoise } from './noise.ts'
import { type Gauge, pressureAt, type Said } from './pressures.ts'

/** Since a cabling job these two channels carry each other's gauge. */
const CROSSED_SINCE = at('2026-10-20 10:40').getTime()
const CROSSED: Record<string, string> = { 'HC-03B': 'HC-04A', 'HC-04A': 'HC-03B' }

interface Place {
  segment: string
  gauge: Gauge
}

const PLACES = new Map<string, Place>(
  SEGMENTS.flatMap(({ tag, short }) => [
    [`HC-${short}A`, { segment: tag, gauge: 'A' }] as const,
    [`HC-${short}B`, { segment: tag, gauge: 'B' }] as const,
    [`CC-${short}`, { segment: tag, gauge: 'C' }] as const,
  ]),
)

/** Gauge channels of the segments with these numbers. */
export function channelsOf(first: number, last: number): string[] {
  return SEGMENTS.filter(({ id }) => id >= first && id <= last).flatMap(({ short }) => [
    `HC-${short}A`,
    `HC-${short}B`,
    `CC-${short}`,
  ])
}

/** Segment that a channel is labelled after. */
export function segmentOfChannel(channel: string): string {
  return placeOf(channel).segment
}

function placeOf(channel: string): Place {
  const place = PLACES.get(channel)
  if (place === undefined) throw new Error(`No gauge of the demo is wired to ${channel}`)
  return place
}

/** Last instants of the demo, at which gauges say exactly what the table of its morning says. */
const WITHOUT_NOISE = new Set([NIGHT_END_MS, SG15_LAST.getTime()])

/** HC-14A flickered before it was taken out. */
const FLICKER_FROM = at('2026-10-28 00:00').getTime()

/** What a channel would say at an instant without noise, Pa or a word. */
export function trueAt(channel: string, atMs: number): Said {
  const wired = atMs >= CROSSED_SINCE ? (CROSSED[channel] ?? channel) : channel
  const { segment, gauge } = placeOf(wired)
  return pressureAt(segment, gauge, atMs)
}

/** What a channel says at an instant, Pa or a word. */
export function said(channel: string, atMs: number): Said {
  const value = trueAt(channel, atMs)
  if (typeof value !== 'number' || WITHOUT_NOISE.has(atMs)) return value
  return value * pressureNoise(channel, atMs, channel === 'HC-14A' && atMs >= FLICKER_FROM ? 6 : 1)
}

/** Three digits without closing noughts, as the loggers print them: 5.1e-10, 5.13e-10. */
export function print(value: number): string {
  const [digits, exponent] = value.toExponential(2).split('e') as [string, string]
  const power = Number(exponent)
  const sign = power < 0 ? '-' : '+'
  return `${digits.replace(/\.?0+$/, '')}e${sign}${String(Math.abs(power)).padStart(2, '0')}`
}
