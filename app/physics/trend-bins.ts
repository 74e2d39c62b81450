/** Readings gathered into even bins of time, and the daily wave of a tube that follows its hall taken out of them. */
import { median } from './statistics.ts'
import type { LogSeries } from './trend.ts'

export interface BinnedSeries extends LogSeries {
  /** Which bin i has its true neighbour at i + 1 (no gap between). */
  hasNeighbour: boolean[]
  widthHours: number
}

/**
 * Median of ln p and mean time per bin. A reading beyond its gauge's range ranks below or above all others, so a bin
 * stays a measured value while more than half of it was measured, and a lone spike changes nothing. Even bins, because
 * a burst of readings in one hour knows no more of the trend than a few.
 */
export function binEvenly(data: LogSeries, endHours: number, startHours: number, most: number): BinnedSeries {
  const widthHours = (endHours - startHours) / most
  const members: number[][] = Array.from({ length: most }, () => [])
  for (let i = 0; i < data.x.length; i++) {
    const place = Math.floor((Math.exp(data.x[i]!) - startHours) / widthHours)
    members[Math.min(most - 1, Math.max(0, place))]!.push(i)
  }
  const kept = members.flatMap((bin, index) => {
    if (bin.length === 0) return []
    const hours = bin.reduce((sum, i) => sum + Math.exp(data.x[i]!), 0) / bin.length
    const ranked = bin.map((i) => (data.code[i] === 0 ? data.y[i]! : data.code[i]! * Infinity))
    const y = median(ranked)
    if (Number.isFinite(y)) return [{ index, hours, y, code: 0 }]
    // Half and half has no middle to name.
    if (Number.isNaN(y)) return []
    const limits = bin.filter((i) => data.code[i] === Math.sign(y)).map((i) => data.y[i]!)
    return y < 0
      ? [{ index, hours, y: Math.max(...limits), code: -1 }]
      : [{ index, hours, y: Math.min(...limits), code: 1 }]
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
 * Hour of the largest sudden step in the residuals of a trend, or null where none stands out: medians of three bins
 * on either side differ by over a fifth and by eight times their usual difference. Daily waves and drift are far
 * slower than that; a pump or valve is not.
 */
export function suddenStep(bins: BinnedSeries, residuals: Float64Array): number | null {
  const steps: { at: number; size: number }[] = []
  for (let i = 2; i + 3 < bins.x.length; i++) {
    const around = [i - 2, i - 1, i, i + 1, i + 2, i + 3]
    if (around.some((j) => bins.code[j] !== 0)) continue
    const size = median(residuals.subarray(i + 1, i + 4)) - median(residuals.subarray(i - 2, i + 1))
    steps.push({ at: i, size: Math.abs(size) })
  }
  if (steps.length < 8) return null
  const usual = 1.4826 * median(steps.map((s) => s.size))
  const largest = steps.reduce((a, b) => (b.size > a.size ? b : a))
  if (largest.size < Math.max(0.2, 8 * usual)) return null
  return (Math.exp(bins.x[largest.at]!) + Math.exp(bins.x[largest.at + 1]!)) / 2
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
