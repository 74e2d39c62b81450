/**
 * Noise that depends on nothing but a name and an instant: the same reading comes out whatever was generated before it,
 * in every process and on every machine.
 */

/** Scatter of a single pressure reading from row to row, and its slow wander, as shares of the reading: 2 % together. */
export const WHITE = 0.016
const WANDER = 0.012
/** The wander forgets itself within this time. */
const WANDER_MS = 90 * 60_000

const SEEDS = new Map<string, number>()

/** A whole number for a name (FNV-1a). */
function seedOf(name: string): number {
  const known = SEEDS.get(name)
  if (known !== undefined) return known
  let hash = 0x811c9dc5
  for (let index = 0; index < name.length; index += 1) {
    hash = Math.imul(hash ^ name.charCodeAt(index), 0x01000193)
  }
  SEEDS.set(name, hash)
  return hash
}

/** Uniform in [0, 1) from two whole numbers (a 32-bit finaliser). */
function uniform(seed: number, salt: number): number {
  let hash = seed ^ Math.imul(salt, 0x9e3779b1)
  hash = Math.imul(hash ^ (hash >>> 16), 0x85ebca6b)
  hash = Math.imul(hash ^ (hash >>> 13), 0xc2b2ae35)
  return ((hash ^ (hash >>> 16)) >>> 0) / 4_294_967_296
}

/** Mean 0, deviation 1, never beyond 3.5: four uniform numbers. */
function bell(seed: number, salt: number): number {
  const sum =
    uniform(seed, salt) +
    uniform(seed + 0x1000193, salt) +
    uniform(seed + 0x2000326, salt) +
    uniform(seed + 0x30004b9, salt)
  return (sum - 2) * Math.sqrt(3)
}

/** Mean 0, deviation about 1, for a name at an instant; independent from minute to minute. */
export function scatter(name: string, atMs: number): number {
  return bell(seedOf(name), Math.round(atMs / 60_000))
}

/** As `scatter`, but independent from second to second. */
export function scatterBySecond(name: string, atMs: number): number {
  return bell(seedOf(`${name}/s`), Math.round(atMs / 1000))
}

/** Mean 0, deviation about 1 for a name, changing slowly over `spanMs`. */
export function wander(name: string, atMs: number, spanMs: number): number {
  const seed = seedOf(name) ^ 0x5bd1e995
  const node = Math.floor(atMs / spanMs)
  const share = atMs / spanMs - node
  // Weights whose squares add to one keep the deviation the same between nodes.
  const angle = (share * Math.PI) / 2
  return Math.cos(angle) * bell(seed, node) + Math.sin(angle) * bell(seed, node + 1)
}

/** A factor around 1 for a pressure reading of a channel; `times` makes a noisy gauge noisier. */
export function pressureNoise(channel: string, atMs: number, times = 1): number {
  return 1 + times * (WHITE * scatter(channel, atMs) + WANDER * wander(channel, atMs, WANDER_MS))
}

/** One of a list, by a name: the same at every run. */
export function pick<T>(list: readonly T[], name: string): T {
  return list[Math.floor(uniform(seedOf(name), 7) * list.length)] as T
}
