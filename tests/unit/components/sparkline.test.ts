import { describe, expect, test } from 'vitest'
import { sparkPath } from '#app/components/charts/spark-path.ts'

describe('a sparkline', () => {
  test('begins anew after a gap instead of bridging it', () => {
    const { path, dots } = sparkPath([1e-7, 2e-7, null, 2e-7, 1e-7])
    expect(path.match(/M/g)).toHaveLength(2)
    expect(path.match(/L/g)).toHaveLength(2)
    expect(dots).toEqual([])
  })

  test('treats what has no logarithm as a gap', () => {
    expect(sparkPath([1e-7, 2e-7, 0, 2e-7, 1e-7])).toEqual(sparkPath([1e-7, 2e-7, null, 2e-7, 1e-7]))
    expect(sparkPath([1e-7, -1e-7, 1e-7]).path).toBe('')
  })

  test('shows a value between two gaps as a dot', () => {
    expect(sparkPath([null, 1e-7, null]).dots).toEqual([{ x: 48, y: 11 }])
    expect(sparkPath([null, null])).toEqual({ path: '', dots: [] })
  })

  test('draws noise of a few per cent as nearly flat', () => {
    const heights = (path: string) =>
      [...path.matchAll(/[ML][\d.]+ ([\d.]+)/g)].map((match) => Number(match[1]))
    const noise = heights(sparkPath([1e-7, 1.03e-7, 0.98e-7, 1.01e-7]).path)
    const fall = heights(sparkPath([1e-5, 1e-6, 1e-7, 1e-8]).path)
    expect(Math.max(...noise) - Math.min(...noise)).toBeLessThan(2)
    expect(Math.max(...fall) - Math.min(...fall)).toBeCloseTo(18, 6)
  })

  test('puts higher pressure higher up', () => {
    const [first, last] = [...sparkPath([1e-8, 1e-5]).path.matchAll(/ ([\d.]+)/g)].map((match) =>
      Number(match[1]),
    )
    expect(first).toBeGreaterThan(last ?? Number.NaN)
  })
})
