/** Readings gathered into even bins of time, and the daily wave of a tube that follows its hall taken out of them. */
import type { LogSeries } from './trend.ts'

export interface BinnedSeries extends LogSeries {
  /** Which bin i has its true neighbour at i + 1 (no gap between). */
  hasNeighbour: boolean[]
  widthHours: number
}

/**
 * Mean of ln p and of time per bin. A bin is censored where more than half of its readings are, and then keeps the
 * loosest limit of them. Even bins, because a burst of readings in one hour knows no more of the trend than a few.
 */
export function binEvenly(data: LogSeries, endHours: number, startHours: number, most: number): BinnedSeries {
  const widthHours = (endHours - startHours) / most
  const sums = Array.from({ length: most }, () => ({
    n: 0,
    t: 0,
    y: 0,
    marks: [0, 0],
    limit: [-Infinity, Infinity],
  }))
  for (let i = 0; i < data.x.length; i++) {
    const hours = Math.exp(data.x[i]!)
    const bin = sums[Math.min(most - 1, Math.max(0, Math.floor((hours - startHours) / widthHours)))]!
    const code = data.code[i]!
    if (code === 0) {
      bin.n++
      bin.t += hours
      bin.y += data.y[i]!
    } else if (code < 0) {
      bin.marks[0]!++
      bin.limit[0] = Math.max(bin.limit[0]!, data.y[i]!)
    } else {
      bin.marks[1]!++
      bin.limit[1] = Math.min(bin.limit[1]!, data.y[i]!)
    }
  }
  const kept = sums.flatMap((bin, index) => {
    const [below, above] = bin.marks as [number, number]
    if (bin.n + below + above === 0) return []
    const middle = startHours + (index + 0.5) * widthHours
    if (below > bin.n + above) return [{ index, hours: middle, y: bin.limit[0]!, code: -1 }]
    if (above > bin.n + below) return [{ index, hours: middle, y: bin.limit[1]!, code: 1 }]
    return bin.n === 0 ? [] : [{ index, hours: bin.t / bin.n, y: bin.y / bin.n, code: 0 }]
  })
  return {
    x: Float64Array.from(kept, (k) => Math.log(k.hours)),
    y: Float64Array.from(kept, (k) => k.y),
    code: Int8Array.from(kept, (k) => k.code),
    hasNeighbour: kept.map((k, i) => kept[i + 1]?.index === k.index + 1),
    widthHours,
  }
}

/**
 * The daily wave a cos + b sin of period 24 h that best explains `residuals` of the measured bins, as a value per bin.
 * All zero where the window is too short to tell a wave from the trend (under a day and a half).
 */
export function dailyWave(data: LogSeries, residuals: Float64Array): Float64Array {
  const wave = new Float64Array(data.x.length)
  const hours = data.x.map(Math.exp)
  if (hours.length < 12 || hours[hours.length - 1]! - hours[0]! < 36) return wave
  let n = 0
  const sum = { c: 0, s: 0, r: 0, cc: 0, ss: 0, cs: 0, cr: 0, sr: 0 }
  for (let i = 0; i < hours.length; i++) {
    if (data.code[i] !== 0) continue
    const c = Math.cos((2 * Math.PI * hours[i]!) / 24)
    const s = Math.sin((2 * Math.PI * hours[i]!) / 24)
    const r = residuals[i]!
    n++
    sum.c += c
    sum.s += s
    sum.r += r
    sum.cc += c * c
    sum.ss += s * s
    sum.cs += c * s
    sum.cr += c * r
    sum.sr += s * r
  }
  if (n < 12) return wave
  const cc = sum.cc - (sum.c * sum.c) / n
  const ss = sum.ss - (sum.s * sum.s) / n
  const cs = sum.cs - (sum.c * sum.s) / n
  const cr = sum.cr - (sum.c * sum.r) / n
  const sr = sum.sr - (sum.s * sum.r) / n
  const determinant = cc * ss - cs * cs
  if (!(determinant > 1e-6 * n * n)) return wave
  const a = (cr * ss - sr * cs) / determinant
  const b = (sr * cc - cr * cs) / determinant
  for (let i = 0; i < hours.length; i++) {
    const phase = (2 * Math.PI * hours[i]!) / 24
    wave[i] = a * Math.cos(phase) + b * Math.sin(phase)
  }
  return wave
}
