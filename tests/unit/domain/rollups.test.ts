import { describe, expect, it } from 'vitest'
import { bucketStart, levelFor, ROLLUP_LEVELS, wholeBuckets } from '#app/domain/rollups.ts'

const MIDNIGHT = Date.UTC(2026, 10, 9)
const MINUTE = 60_000

describe('levels of rollups', () => {
  it('are each made of whole ones of the level before', () => {
    for (const [index, level] of ROLLUP_LEVELS.entries())
      if (index > 0) expect(level % (ROLLUP_LEVELS[index - 1] ?? 0)).toBe(0)
    expect(86_400 % (ROLLUP_LEVELS.at(-1) ?? 0)).toBe(0)
  })

  it('fit bins that are whole multiples and begin where a bucket begins', () => {
    expect(levelFor(MIDNIGHT, 86_400)).toBe(86_400)
    expect(levelFor(MIDNIGHT, 43_200)).toBe(7_200)
    expect(levelFor(MIDNIGHT + 10 * MINUTE, 86_400)).toBe(600)
    expect(levelFor(MIDNIGHT, 1_800)).toBe(600)
    expect(levelFor(MIDNIGHT + MINUTE, 86_400)).toBeNull()
    expect(levelFor(MIDNIGHT, 86_401)).toBeNull()
    expect(levelFor(MIDNIGHT, 60)).toBeNull()
  })
})

describe('stretches as whole buckets', () => {
  it('hold both ends, and join where they touch', () => {
    const at = (minutes: number) => MIDNIGHT + minutes * MINUTE
    expect(
      wholeBuckets(
        [
          { fromMs: at(65), lastMs: at(70) },
          { fromMs: at(1), lastMs: at(9) },
          { fromMs: at(15), lastMs: at(20) - 1 },
          { fromMs: at(3), lastMs: at(4) },
        ],
        600,
      ),
    ).toEqual([
      { fromMs: at(0), toMs: at(20) },
      { fromMs: at(60), toMs: at(80) },
    ])
  })

  it('count from 1970 in UTC, before it too', () => {
    expect(bucketStart(-1, 600)).toBe(-600_000)
    expect(bucketStart(0, 600)).toBe(0)
  })
})
