import { describe, expect, it } from 'vitest'
import {
  type ClockCorrection,
  correctionFault,
  offsetWords,
  ownStretches,
  readOffset,
  trueTime,
  widened,
} from '#app/domain/clock-correction.ts'

const DAY = 86_400_000
const START = Date.UTC(2026, 9, 1)
/** A clock that loses three minutes in thirty days and is then set right. */
const SLOW: ClockCorrection = {
  startsMs: START,
  endsMs: START + 30 * DAY,
  startOffsetMs: 0,
  endOffsetMs: 180_000,
}
/** One that was set two seconds ahead and gains more. */
const FAST: ClockCorrection = {
  startsMs: START + 40 * DAY,
  endsMs: START + 50 * DAY,
  startOffsetMs: -2000,
  endOffsetMs: -91_234,
}

describe('a corrected clock', () => {
  it('goes straight from one end to the other, and is right outside', () => {
    expect(trueTime(START - 1, [SLOW])).toBe(START - 1)
    expect(trueTime(START, [SLOW])).toBe(START)
    expect(trueTime(START + 15 * DAY, [SLOW])).toBe(START + 15 * DAY + 90_000)
    expect(trueTime(START + 30 * DAY - 1, [SLOW])).toBe(START + 30 * DAY - 1 + 180_000)
    expect(trueTime(START + 30 * DAY, [SLOW])).toBe(START + 30 * DAY)
    expect(trueTime(FAST.startsMs, [SLOW, FAST])).toBe(FAST.startsMs - 2000)
    expect(trueTime(FAST.startsMs + 5 * DAY, [FAST, SLOW])).toBe(FAST.startsMs + 5 * DAY - 46_617)
  })

  it('takes nothing from a source without corrections', () => {
    expect(ownStretches([], START, START + 5)).toEqual([{ fromMs: START, toMs: START + 5, correction: null }])
  })

  it('finds exactly the own times that truly lie in a window, to the millisecond', () => {
    const corrections = [FAST, SLOW]
    for (const from of [
      START - 3000,
      START + 7 * DAY + 1,
      SLOW.endsMs - 60_000,
      SLOW.endsMs + 179_990,
      FAST.startsMs - 2500,
      FAST.endsMs - 91_300,
    ]) {
      const to = from + 5003
      const stretches = ownStretches(corrections, from, to)
      for (let own = from - 200_000; own < to + 200_000; own += 1) {
        const truly = trueTime(own, corrections)
        const inside = truly >= from && truly < to
        const listed = stretches.some(({ fromMs, toMs }) => own >= fromMs && own < toMs)
        if (inside !== listed)
          throw new Error(`${own - from} ms after the window's start: ${inside} ${listed}`)
      }
    }
  })

  it('meets one true time twice where the clock was set forward over readings that follow', () => {
    const overlap = ownStretches([SLOW], SLOW.endsMs + 60_000, SLOW.endsMs + 120_000)
    expect(overlap.map(({ correction }) => correction)).toEqual([SLOW, null])
  })

  it('widens a stretch by what its readings are shifted, and by nothing else', () => {
    const last = SLOW.endsMs - 1
    expect(widened([SLOW, FAST], START - DAY, last)).toEqual({ fromMs: START - DAY, lastMs: last + 180_000 })
    expect(widened([FAST], FAST.startsMs, FAST.endsMs + DAY)).toEqual({
      fromMs: FAST.startsMs - 2000,
      lastMs: FAST.endsMs + DAY,
    })
    expect(widened([], START, START)).toEqual({ fromMs: START, lastMs: START })
  })
})

describe('what is no correction', () => {
  it.each([
    [{ endsMs: START }, 'endsAt'],
    [{ startOffsetMs: 2 * DAY }, 'startOffset'],
    [{ endOffsetMs: -2 * DAY }, 'endOffset'],
    [{ endsMs: START + 3_600_000 }, 'endOffset'],
  ] as const)('%j is refused at %s', (change, field) => {
    expect(correctionFault({ ...SLOW, ...change })?.field).toBe(field)
  })

  it('takes a slow drift', () => {
    expect(correctionFault(SLOW)).toBeNull()
    expect(correctionFault(FAST)).toBeNull()
  })
})

describe('offsets as people write them', () => {
  it.each([
    ['150', 150_000],
    ['+2:30', 150_000],
    ['-0:02:30', -150_000],
    ['−2,5', -2500],
    ['1.234 s', 1234],
    ['0', 0],
  ])('%s is %d ms', (text, ms) => {
    expect(readOffset(text)).toBe(ms)
  })

  it.each(['', 'two', '1:2:3:4', '1e3', '--3'])('“%s” is refused with what was expected', (text) => {
    expect(() => readOffset(text)).toThrow('expected seconds')
  })

  it('says them as slow and fast', () => {
    expect(offsetWords(150_000)).toBe('2 min 30 s slow')
    expect(offsetWords(-2500)).toBe('2.5 s fast')
    expect(offsetWords(0)).toBe('right')
  })
})
