import { expect, test } from 'vitest'
import { metresBetween, overlaps, type Stretch, shared, zonesAround } from '#app/domain/tunnel-stretch.ts'

const main = (fromM: number, toM: number): Stretch => ({ line: 'MAIN', fromM, toM })
const spur = (fromM: number, toM: number): Stretch => ({ line: 'SPUR', fromM, toM })
const JOINTS = [{ spur: 'SPUR', line: 'MAIN', atM: 1200 }]
const TEN = { westM: 10, eastM: 10 }

test('stretches that only touch share nothing', () => {
  expect(overlaps(main(600, 760), main(760, 900))).toBe(false)
  expect(overlaps(main(600, 760), main(759.9, 900))).toBe(true)
  expect(shared(main(740, 760), main(750, 900))).toEqual(main(750, 760))
  expect(shared(main(600, 700), spur(600, 700))).toBeNull()
})

test.each([
  [main(0, 150), main(150, 300), 0],
  [main(0, 150), main(300, 450), 150],
  [main(300, 450), main(0, 150), 150],
  [main(1040, 1200), spur(0, 90), 0],
  [spur(4, 90), main(1350, 1500), 154],
  [main(0, 150), { line: 'ELSEWHERE', fromM: 0, toM: 10 }, Number.POSITIVE_INFINITY],
])('%o and %o lie %d m apart', (a, b, metres) => {
  expect(metresBetween(a, b, JOINTS)).toBe(metres)
})

test('two spurs are as far apart as their joints and the way out of each', () => {
  const joints = [...JOINTS, { spur: 'CELLAR', line: 'MAIN', atM: 1230 }]
  expect(metresBetween(spur(5, 20), { line: 'CELLAR', fromM: 2, toM: 9 }, joints)).toBe(37)
})

test('the zone around a segment reaches so many metres past both ends, and not below chainage 0', () => {
  expect(zonesAround(main(600, 750), TEN, JOINTS)).toEqual([main(590, 760)])
  expect(zonesAround(main(0, 150), { westM: 10, eastM: 25 }, JOINTS)).toEqual([main(0, 175)])
})

test('the zone around the end at a joint goes on into the spur, and back', () => {
  expect(zonesAround(main(1040, 1196), TEN, JOINTS)).toEqual([main(1030, 1206), spur(0, 6)])
  expect(zonesAround(spur(0, 90), TEN, JOINTS)).toEqual([spur(0, 100), main(1190, 1210)])
  expect(zonesAround(spur(10, 90), TEN, JOINTS)).toEqual([spur(0, 100)])
})
