import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { copyTrials } from '#app/domain/night-files/copy-trials.ts'
import { compareWithStored, copyText, type StoredPair } from '#app/domain/night-files/rounded-copy.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { readFlat } from '#tests/fixtures/night-files/read.ts'

const START = Date.UTC(2026, 10, 6, 5)

/** Pairs of one channel with the stored value and what a file makes of it. */
function pairs(stored: readonly number[], inFile: (value: number, i: number) => number): StoredPair[] {
  return stored.map((value, i) => ({
    channel: 'HC-01A',
    quantity: 'pressure',
    atMs: START + i * 60_000,
    inFile: inFile(value, i),
    stored: value,
  }))
}

/** Noisy values with three digits, as the gauges of the west write them. */
const NIGHT = Array.from({ length: 200 }, (_, i) => Number(`${5 + ((i * 37) % 97) / 100}e-8`))
const toDigits = (digits: number) => (value: number) => Number(value.toPrecision(digits))

describe('66 a file beside what is stored', () => {
  it('is a rounded copy when it has the same instants with fewer digits', () => {
    const finding = compareWithStored(pairs(NIGHT, toDigits(2)))
    expect(finding).toMatchObject({ kind: 'rounded-copy', pairs: 200, digits: 2 })
    expect(finding.equal + finding.rounded).toBe(200)
    expect(finding.examples).toHaveLength(3)
    expect(copyText(finding)).toContain('HC-01A: 5.40 × 10⁻⁸ Pa here, 5.37 × 10⁻⁸ Pa held')
  })

  it('is one as well when a spreadsheet cut the digits, and with a stray cell', () => {
    const cut = (value: number) => Math.trunc(value * 1e9) / 1e9
    expect(compareWithStored(pairs(NIGHT, cut)).kind).toBe('rounded-copy')
    const stray = (value: number, i: number) => (i === 5 ? 4.2e-3 : Number(value.toPrecision(2)))
    expect(compareWithStored(pairs(NIGHT, stray)).kind).toBe('rounded-copy')
  })

  it('is the same where every value is, also after a conversion of units', () => {
    expect(compareWithStored(pairs(NIGHT, (value) => (value / 100) * 100)).kind).toBe('same')
    expect(copyText(compareWithStored(pairs(NIGHT, (value) => value)))).toBeNull()
  })

  it('is finer when the stored one is the copy', () => {
    const swapped = pairs(NIGHT, toDigits(2)).map((pair) => ({
      ...pair,
      inFile: pair.stored,
      stored: pair.inFile,
    }))
    expect(compareWithStored(swapped).kind).toBe('finer')
  })

  it('is different where values are, and proves nothing with a few pairs or none', () => {
    expect(compareWithStored(pairs(NIGHT, (value) => value * 1.37)).kind).toBe('different')
    expect(compareWithStored(pairs(NIGHT.slice(0, 5), toDigits(2))).kind).toBe('different')
    expect(compareWithStored([]).kind).toBe('no-overlap')
  })

  it('never calls a file a copy of values that are farther than a step of its digits', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 1, max: 9.99, noNaN: true }), { minLength: 30, maxLength: 60 }),
        fc.integer({ min: 1, max: 3 }),
        fc.double({ min: 1.3, max: 3, noNaN: true }),
        (mantissas, digits, factor) => {
          const stored = mantissas.map((mantissa) => Number((mantissa * 1e-8).toPrecision(6)))
          const away = pairs(stored, (value) => Number((value * factor).toPrecision(digits)))
          const far = away.filter(
            ({ inFile, stored: held }) =>
              Math.abs(inFile - held) >= 10 ** (Math.floor(Math.log10(held)) - digits + 1),
          )
          if (far.length > 0.1 * away.length) expect(compareWithStored(away).kind).not.toBe('rounded-copy')
        },
      ),
      { seed: 5 },
    )
  })

  it('recognises any rounding of any values that have more digits', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 1, max: 9.99, noNaN: true }), { minLength: 30, maxLength: 60 }),
        fc.integer({ min: -12, max: 4 }),
        (mantissas, power) => {
          // A fourth digit that is never zero, so that no value is its own rounding.
          const stored = mantissas.map((mantissa) => Number(`${mantissa.toFixed(2)}7e${power}`))
          expect(compareWithStored(pairs(stored, toDigits(2))).kind).toBe('rounded-copy')
        },
      ),
      { seed: 6 },
    )
  })
})

describe('the hand export of the demo', () => {
  const bytes = (name: string) =>
    readFileSync(new URL(`../../../../seeds/night-files/${name}`, import.meta.url))

  it('is told to be a copy of the night it was made from, although its unit is gone and its dates are turned', async () => {
    const original = await readFlat(bytes('NL-W_2026-11-06.csv'), NL_W)
    const stored = new Map(original.readings.map((one) => [`${one.channel} ${one.at}`, one.value]))
    const copy = await readFlat(bytes('NL-W_2026-11-06_copy.csv'), NL_W)
    expect(copy.out.state).toBe('refused')
    const kinds: string[] = []
    for (const { profile, answers } of copyTrials(NL_W, copy.out)) {
      const { readings } = await readFlat(bytes('NL-W_2026-11-06_copy.csv'), profile, { answers })
      const found: StoredPair[] = readings.flatMap(({ channel, at, value }) => {
        const held = stored.get(`${channel} ${at}`)
        if (value === null || held === undefined || held === null) return []
        return [{ channel, quantity: 'pressure', atMs: Date.parse(at), inFile: value, stored: held }]
      })
      kinds.push(compareWithStored(found).kind)
    }
    expect(kinds.sort()).toEqual(['no-overlap', 'rounded-copy'])
  })
})
