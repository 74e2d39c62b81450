import { SKETCH_STEPS } from './limits.ts'
import type { Sketch } from './types.ts'

/**
 * Lowest and highest value in equal steps of time, for a small plot. The span of a file is not known while it is
 * read, so whenever the steps run out their width doubles and neighbours join.
 */
export class SketchBins {
  #fromMs = Number.NaN
  #stepMs: number
  #low: number[] = []
  #high: number[] = []

  constructor(stepMs: number) {
    this.#stepMs = Math.max(stepMs, 1000)
  }

  add(atMs: number, value: number): void {
    if (Number.isNaN(this.#fromMs)) this.#fromMs = atMs
    // A reading before the first one (disorder) is left out: a sketch is no record.
    if (atMs < this.#fromMs) return
    let bin = Math.floor((atMs - this.#fromMs) / this.#stepMs)
    while (bin >= SKETCH_STEPS) {
      this.#halve()
      bin = Math.floor((atMs - this.#fromMs) / this.#stepMs)
    }
    const low = this.#low[bin]
    const high = this.#high[bin]
    if (low === undefined || !(low <= value)) this.#low[bin] = value
    if (high === undefined || !(high >= value)) this.#high[bin] = value
  }

  #halve(): void {
    const join = (values: number[], pick: (a: number, b: number) => number): number[] => {
      const joined: number[] = []
      for (let i = 0; i < values.length; i += 1) {
        const value = values[i]
        if (value === undefined) continue
        const at = i >> 1
        const other = joined[at]
        joined[at] = other === undefined ? value : pick(other, value)
      }
      return joined
    }
    this.#low = join(this.#low, Math.min)
    this.#high = join(this.#high, Math.max)
    this.#stepMs *= 2
  }

  result(): Sketch | null {
    if (Number.isNaN(this.#fromMs)) return null
    const rounded = (values: number[]) =>
      Array.from(values, (value) => (value === undefined ? null : Number(value.toPrecision(4))))
    return { fromMs: this.#fromMs, stepMs: this.#stepMs, low: rounded(this.#low), high: rounded(this.#high) }
  }
}
