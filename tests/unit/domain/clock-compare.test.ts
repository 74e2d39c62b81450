import { describe, expect, it } from 'vitest'
import { type ClockSample, compareClocks } from '#app/domain/clock-compare.ts'

const MINUTE = 60_000
const START = Date.UTC(2026, 9, 1)
/** Minutes at which a valve lets the pressure jump up or down by ten. */
const EVENTS = [37, 62, 181, 400, 433]

/** Readings every minute by a clock that shows so much less than true time. */
function seen(events: readonly number[], slowMs: number, shiftMs: number): ClockSample[] {
  return Array.from({ length: 600 }, (_, i) => {
    const atMs = START + i * MINUTE + shiftMs
    const steps = events.filter((minute) => atMs >= START + minute * MINUTE).length
    const noise = 1 + 0.1 * Math.sin(i * 1.7)
    return { atMs: atMs - slowMs, value: 1e-7 * (steps % 2 === 0 ? 1 : 10) * noise }
  })
}

const OTHER = seen(EVENTS, 0, 11_000)
const most = 60 * MINUTE

describe('comparing two clocks by the steps both have seen', () => {
  it.each([0, 150_000, -417_000, 43 * MINUTE])('finds an offset of %d ms within what it says', (slowMs) => {
    const found = compareClocks(seen(EVENTS, slowMs, 0), OTHER, most)
    if (found.kind !== 'estimate') throw new Error(found.text)
    expect(Math.abs(found.offsetMs - slowMs)).toBeLessThanOrEqual(found.uncertaintyMs)
    expect(found.uncertaintyMs).toBeLessThanOrEqual(MINUTE)
    expect(found.steps).toBe(EVENTS.length)
  })

  it('bears a step that one of them has missed', () => {
    const found = compareClocks(seen(EVENTS, 150_000, 0), seen([37, 62, 181, 400], 0, 11_000), most)
    expect(found).toMatchObject({ kind: 'estimate', steps: 4 })
  })

  it('refuses too few steps, steps that do not fit, and those that fit twice', () => {
    expect(compareClocks(seen([37, 62], 0, 0), OTHER, most)).toMatchObject({ kind: 'too-little' })
    expect(compareClocks(seen([20, 100, 250], 0, 0), seen([150, 301, 333, 555], 0, 0), most).kind).toBe(
      'too-little',
    )
    const even = [30, 50, 70, 90]
    expect(
      compareClocks(seen(even, 0, 0), seen([...even, 110, 130, 150, 170], 0, 0), 120 * MINUTE),
    ).toMatchObject({
      kind: 'too-little',
      text: expect.stringContaining('equally well'),
    })
  })
})
