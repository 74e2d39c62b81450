/** Means over equal stretches of time, and the robust slope through them. */
import { z } from 'zod'

const BinSchema = z.object({
  /** Number of the bin since 1970. */
  index: z.number(),
  sum: z.number(),
  count: z.number(),
  coveredMs: z.number(),
  lastMs: z.number(),
})
export type Bin = z.infer<typeof BinSchema>

const BinsMemorySchema = z.object({
  binMs: z.number(),
  kept: z.array(BinSchema),
  open: BinSchema.nullable(),
  /** Instant of the newest reading of any kind. */
  seenMs: z.number().nullable(),
})

/**
 * Collects values into bins. A good reading covers the time back to the reading before it, whatever that was worth, but
 * no more than `reachMs`; so a word between two values halves the coverage, and a hole covers nothing.
 */
export class Bins {
  readonly binMs: number
  readonly #most: number
  readonly #reachMs: number
  readonly #periodMs: number
  #kept: Bin[] = []
  #open: Bin | null = null
  #seenMs: number | null = null

  /** @param most how many closed bins are remembered */
  constructor(binMs: number, most: number, periodS: number, memory: unknown) {
    this.binMs = binMs
    this.#most = most
    this.#periodMs = periodS * 1000
    this.#reachMs = Math.max(3000 * periodS, binMs / 3)
    const found = BinsMemorySchema.safeParse(memory)
    if (found.success && found.data.binMs === binMs) {
      this.#kept = found.data.kept.map((bin) => ({ ...bin }))
      this.#open = found.data.open === null ? null : { ...found.data.open }
      this.#seenMs = found.data.seenMs
    }
  }

  memory(): unknown {
    return { binMs: this.binMs, kept: this.#kept, open: this.#open, seenMs: this.#seenMs }
  }
  /** Forgets all values: what follows is not to be compared with them. */
  forget(): void {
    this.#kept = []
    this.#open = null
  }

  /** Takes a reading; NaN for one that is no measured value. Bins that end before it have to be closed first. */
  add(at: number, value: number): void {
    const apart = this.#seenMs === null ? this.#periodMs : at - this.#seenMs
    this.#seenMs = at
    if (Number.isNaN(value)) return
    const covers = apart > this.#reachMs ? this.#periodMs : apart
    const index = Math.floor(at / this.binMs)
    if (this.#open === null) {
      this.#open = { index, sum: value, count: 1, coveredMs: Math.min(covers, this.binMs), lastMs: at }
      return
    }
    this.#open.sum += value
    this.#open.count += 1
    this.#open.coveredMs = Math.min(this.#open.coveredMs + covers, this.binMs)
    this.#open.lastMs = at
  }

  /** End of the bin that is being filled; infinite while there is none. */
  get openEndMs(): number {
    return this.#open === null ? Number.POSITIVE_INFINITY : (this.#open.index + 1) * this.binMs
  }

  /** Closes the bin that is being filled. */
  close(): Bin | null {
    const bin = this.#open
    if (bin === null) return null
    this.#open = null
    this.#kept.push(bin)
    if (this.#kept.length > this.#most) this.#kept.shift()
    return bin
  }

  /** Closed bins of the last `count` numbers up to one. */
  window(lastIndex: number, count: number): Bin[] {
    return this.#kept.filter(({ index }) => index > lastIndex - count && index <= lastIndex)
  }

  /** Share of the last `count` bins that good readings cover. */
  coverage(lastIndex: number, count: number): number {
    return covered(this.window(lastIndex, count), count, this.binMs)
  }

  /** Share of so many bins before an instant, the one that is being filled with them, that good readings cover. */
  coverageBefore(untilMs: number, count: number): number {
    const last = Math.ceil(untilMs / this.binMs) - 1
    const filling = this.#open !== null && this.#open.index <= last ? [this.#open] : []
    return Math.min(1, covered([...this.window(last, count), ...filling], count, this.binMs))
  }
}

/** Share of so many bins that good readings cover. */
function covered(bins: readonly Bin[], count: number, binMs: number): number {
  return bins.reduce((sum, { coveredMs }) => sum + coveredMs, 0) / (count * binMs)
}

let slopes = new Float64Array(512)

/**
 * Median of the slopes between all pairs of bins, per bin (Theil 1950, Sen 1968: up to 29 % of the points may be
 * arbitrarily wrong without carrying it away). NaN with fewer than three bins.
 */
export function medianSlope(bins: readonly Bin[]): number {
  const pairs = (bins.length * (bins.length - 1)) / 2
  if (bins.length < 3) return Number.NaN
  if (slopes.length < pairs) slopes = new Float64Array(2 * pairs)
  let n = 0
  for (let i = 0; i < bins.length; i += 1) {
    const a = bins[i] as Bin
    const mean = a.sum / a.count
    for (let j = i + 1; j < bins.length; j += 1) {
      const b = bins[j] as Bin
      slopes[n] = (b.sum / b.count - mean) / (b.index - a.index)
      n += 1
    }
  }
  const upper = select(slopes, n, n >> 1)
  return n % 2 === 1 ? upper : (upper + select(slopes, n, (n >> 1) - 1)) / 2
}

/** The k-th smallest of the first n values; reorders them. */
function select(values: Float64Array, n: number, k: number): number {
  let low = 0
  let high = n - 1
  while (low < high) {
    const pivot = values[(low + high) >> 1] as number
    let i = low
    let j = high
    while (i <= j) {
      while ((values[i] as number) < pivot) i += 1
      while ((values[j] as number) > pivot) j -= 1
      if (i > j) break
      const held = values[i] as number
      values[i] = values[j] as number
      values[j] = held
      i += 1
      j -= 1
    }
    if (k <= j) high = j
    else if (k >= i) low = i
    else return values[k] as number
  }
  return values[k] as number
}
