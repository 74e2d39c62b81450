/**
 * Noise that depends on nothing but a name and an instant: the same reading comes out whatever was generated before it,
 * in every process and on every machine.
 */

/** Uniform in [0, 1), from a text and a number (FNV-1a, then a 32-bit finaliser). */
function hashUniform(text: string, salt: number): number {
  let hash = 0x811c9dc5
  for (let index = 0; index < text.length; index += 1) {
    hash = Math.imul(hash ^ text.charCodeAt(index), 0x01000193)
  }
  hash = Math.imul(hash ^ (salt & 0xffff), 0x01000193)
  hash = Math.imul(hash ^ (salt >>> 16), 0x01000193)
  hash = Math.imul(hash ^ (hash >>> 16), 0x85ebca6b)
  hash = Math.imul(hash ^ (hash >>> 13), 0xc2b2ae35)
  return ((hash ^ (hash >>> 16)) >>> 0) / 4_294_967_296
}

/**
 * A factor around 1 with the standard deviation given, for one channel at one instant. Sums twelve uniform numbers, so
 * it never strays more than six deviations.
 */
export function noiseFactor(channel: string, atMs: number, deviation: number): number {
  const minute = Math.round(atMs / 60_000)
  let sum = -6
  for (let index = 0; index < 12; index += 1) sum += hashUniform(`${channel}/${index}`, minute)
  return 1 + deviation * sum
}

/** Deviation of a single pressure reading, as a share of the reading. */
export const PRESSURE_NOISE = 0.02

const DAY_MS = 86_400_000
/** The tunnel is warmest in the late afternoon; outgassing follows by 1.5 % either way. */
const SWING = 0.015
const WARMEST_MS = 16 * 3_600_000

/** Daily swing at an instant against another, as a factor: 1 at `referenceMs`. */
export function dailySwing(atMs: number, referenceMs: number): number {
  const swing = (ms: number) => 1 + SWING * Math.cos((2 * Math.PI * (ms - WARMEST_MS)) / DAY_MS)
  return swing(atMs) / swing(referenceMs)
}
