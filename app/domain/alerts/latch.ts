/** On- and off-delay of one finding. Counted from reading to reading in the data's own time. */
import { z } from 'zod'

/** Where a reading stands: beyond the limit, in the deadband, back within it, or it says nothing. */
export const BEYOND = 1
export const BETWEEN = 0
export const BACK = -1
export const UNKNOWN = 2
export type Zone = typeof BEYOND | typeof BETWEEN | typeof BACK | typeof UNKNOWN

const stamp = z.number().nullable()
export const LatchMemorySchema = z.object({
  on: z.boolean(),
  beyondMs: stamp,
  beyondStamp: stamp,
  backMs: stamp,
  backStamp: stamp,
  knownMs: stamp,
  knownStamp: stamp,
  peak: z.number().nullable(),
})
export type LatchMemory = z.infer<typeof LatchMemorySchema>

const FRESH: LatchMemory = {
  on: false,
  beyondMs: null,
  beyondStamp: null,
  backMs: null,
  backStamp: null,
  knownMs: null,
  knownStamp: null,
  peak: null,
}

/**
 * Turns on once readings have stood beyond the limit for the on-delay without one that did not, and off once they have
 * been back for the off-delay. Two readings further apart than `bridgeMs` say nothing about the time between: a delay
 * that was running begins anew, and what is on stays on.
 */
export class Latch {
  readonly #onMs: number
  readonly #offMs: number
  readonly #bridgeMs: number
  #m: LatchMemory

  constructor(onMs: number, offMs: number, bridgeMs: number, memory: unknown) {
    this.#onMs = onMs
    this.#offMs = offMs
    this.#bridgeMs = bridgeMs
    const kept = LatchMemorySchema.safeParse(memory)
    this.#m = kept.success ? { ...kept.data } : { ...FRESH }
  }

  get on(): boolean {
    return this.#m.on
  }
  /** Newest reading that said anything; null before the first. */
  get knownMs(): number | null {
    return this.#m.knownStamp
  }
  /** Furthest value since it went beyond. */
  get peak(): number | null {
    return this.#m.peak
  }
  memory(): LatchMemory {
    return this.#m
  }
  reset(): void {
    this.#m = { ...FRESH }
  }
  /** Lets a running delay begin anew: what follows is not one piece with what was before. */
  interrupt(): void {
    this.#m.backMs = null
    if (!this.#m.on) this.#m.beyondMs = null
  }

  /**
   * Takes the next reading.
   *
   * @param at for the delays, ms; `stamp` is the instant that is told (of a mean, its last reading)
   * @param value remembered as the peak when `sign * value` is the largest while beyond
   * @returns 1 when it turned on, -1 when it turned off, otherwise 0
   */
  step(at: number, zone: Zone, value = Number.NaN, sign = 1, stampMs = at): 1 | 0 | -1 {
    if (zone === UNKNOWN) return 0
    const m = this.#m
    if (m.knownMs !== null && at - m.knownMs > this.#bridgeMs) this.interrupt()
    m.knownMs = at
    m.knownStamp = stampMs
    if (zone === BEYOND) {
      m.backMs = null
      if (m.beyondMs === null) {
        m.beyondMs = at
        m.beyondStamp = stampMs
        m.peak = null
      }
      if (!Number.isNaN(value) && (m.peak === null || sign * value > sign * m.peak)) m.peak = value
      if (m.on || at - m.beyondMs < this.#onMs) return 0
      m.on = true
      return 1
    }
    if (!m.on) {
      m.beyondMs = null
      return 0
    }
    if (zone === BETWEEN) {
      m.backMs = null
      return 0
    }
    if (m.backMs === null) {
      m.backMs = at
      m.backStamp = stampMs
    }
    if (at - m.backMs < this.#offMs) return 0
    m.on = false
    m.beyondMs = null
    return -1
  }

  /** When what the last step told began. */
  since(turned: 1 | -1, at: number): number {
    return (turned === 1 ? this.#m.beyondStamp : this.#m.backStamp) ?? at
  }
}
