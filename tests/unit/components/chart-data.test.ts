import { describe, expect, test } from 'vitest'
import {
  alignSeries,
  axisValuesOf,
  type ChartSeries,
  cellNear,
  extremesOf,
  tableRows,
} from '#app/components/charts/chart-data.ts'

const measured: ChartSeries = { label: 'HC-11A', role: 'measured', y: [4e-5, null, 2e-5] }
const forecast: ChartSeries = {
  label: 'forecast',
  role: 'forecast',
  x: [2, 3, 4],
  y: [3e-5, 2e-5, 1e-5],
  low: [3e-5, 1e-5, 5e-6],
  high: [3e-5, 3e-5, 2e-5],
}

describe('curves on one axis', () => {
  const aligned = alignSeries([1, 2, 3], [measured, forecast], false)

  test('keep a gap as a gap and let a place of another curve be passed over', () => {
    expect(aligned.x).toEqual([1, 2, 3, 4])
    expect(aligned.columns[0]?.y).toEqual([4e-5, null, 2e-5, undefined])
    expect(aligned.columns[1]?.y).toEqual([undefined, 3e-5, 2e-5, 1e-5])
    expect(aligned.columns[1]?.band?.low).toEqual([undefined, 3e-5, 1e-5, 5e-6])
    expect(aligned.columns[0]?.band).toBeNull()
  })

  test('turn what has no logarithm into gaps and count it', () => {
    const { columns, leftOut } = alignSeries([1, 2, 3], [{ ...measured, y: [0, -2e-5, 2e-5] }], false)
    expect(columns[0]?.y).toEqual([null, null, 2e-5])
    expect(leftOut).toBe(2)
  })

  test('begin after zero where the places are on a log axis', () => {
    expect(alignSeries([0, 1, 2], [{ ...measured, y: [1, 2, 3] }], true).x).toEqual([1, 2])
  })

  test('give the axis their bands and levels too', () => {
    const values = axisValuesOf(aligned, [1e-7])
    expect(Math.min(...values)).toBe(1e-7)
    expect(values).toContain(5e-6)
  })
})

test('the extremes of a curve carry their places, and an empty curve has none', () => {
  const { x, columns } = alignSeries([1, 2, 3, 4], [{ ...measured, y: [4e-5, null, 9e-6, 2e-5] }], false)
  const [column] = columns
  if (column === undefined) throw new Error('no column')
  expect(extremesOf(x, column)).toEqual({
    first: { x: 1, value: 4e-5 },
    last: { x: 4, value: 2e-5 },
    least: { x: 3, value: 9e-6 },
    greatest: { x: 1, value: 4e-5 },
  })
  expect(extremesOf(x, { ...column, y: [null, null, undefined, null] })).toBeNull()
})

test('a table is thinned evenly and ends with the last place', () => {
  const x = Array.from({ length: 100 }, (_, at) => at + 1)
  const rows = tableRows(alignSeries(x, [{ ...measured, y: x }], false), 30)
  expect(rows.length).toBeLessThanOrEqual(30)
  expect(rows.at(-1)).toEqual({ x: 100, values: [100] })
  expect(new Set(rows.slice(1).map((row, at) => row.x - (rows[at]?.x ?? 0)))).toEqual(new Set([4]))
})

describe('a curve at the place of another', () => {
  const { x, columns } = alignSeries(
    [0, 10, 20],
    [
      { ...measured, y: [4e-5, null, 2e-5] },
      { ...forecast, x: [-5, 4, 6, 11, 25], y: [1, 1, 1, 1, 1] },
    ],
    false,
  )
  const [own] = columns
  if (own === undefined) throw new Error('no column')

  test.each([
    [4, 4e-5],
    [6, null],
    [11, null],
    [20, 2e-5],
    [-5, undefined],
    [25, undefined],
  ])('%d says %s', (place, cell) => {
    expect(cellNear(x, own, x.indexOf(place))).toBe(cell)
  })

  test('has a table with a row for every measured place and for what comes after', () => {
    expect(tableRows({ x, columns, leftOut: 0 }, 30).map((row) => row.x)).toEqual([0, 10, 20, 25])
  })
})
