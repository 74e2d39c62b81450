import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { countLines, fixture, readFlat, sumOfOutcomes } from '#tests/fixtures/night-files/read.ts'
import { RUN_TIMEOUT_MS, runs } from '#tests/fixtures/night-files/runs.ts'

const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))

function utf16(text: string, littleEndian: boolean): Uint8Array {
  const bytes = new Uint8Array(2 + text.length * 2)
  const view = new DataView(bytes.buffer)
  view.setUint16(0, 0xfeff, littleEndian)
  for (let i = 0; i < text.length; i += 1) view.setUint16(2 + 2 * i, text.charCodeAt(i), littleEndian)
  return bytes
}

describe('encodings and line ends', () => {
  it.each([
    ['UTF-8 with a byte order mark', () => `\ufeff${night()}`],
    ['UTF-16, little end first', () => utf16(night(), true)],
    ['UTF-16, big end first', () => utf16(night(), false)],
    ['LF alone', () => night().replaceAll('\r\n', '\n')],
    ['CR alone', () => night().replaceAll('\r\n', '\r')],
    ['CR CR LF', () => night().replaceAll('\r\n', '\r\r\n')],
  ])('reads the same from %s', async (_, make) => {
    const plain = await readFlat(night(), NL_W)
    const { out, readings } = await readFlat(make(), NL_W, {}, 997)
    expect(readings).toEqual(plain.readings)
    expect(out.lines).toEqual(plain.out.lines)
  })
})

describe('whatever the bytes', () => {
  it(
    'every line has one outcome, and the sum is the number of line ends',
    async () => {
      const whole = fixture('nl-w-night.csv')
      await fc.assert(
        fc.asyncProperty(
          fc.array(fc.record({ at: fc.nat(whole.length - 1), byte: fc.integer({ min: 0, max: 255 }) }), {
            maxLength: 40,
          }),
          fc.nat(whole.length),
          fc.integer({ min: 1, max: 5000 }),
          async (edits, length, piece) => {
            const bytes = Uint8Array.from(whole)
            // CR LF pairs stay whole and no CR is added, so that counting LF counts lines.
            for (const { at, byte } of edits)
              if (byte !== 10 && byte !== 13 && bytes[at] !== 10 && bytes[at] !== 13) bytes[at] = byte
            const cut = bytes.subarray(0, bytes[length - 1] === 13 ? length - 1 : length)
            const { out, readings } = await readFlat(cut, NL_W, {}, piece)
            expect(sumOfOutcomes(out)).toBe(out.lines.total)
            expect(out.lines.total).toBe(countLines(cut))
            expect(readings).toHaveLength(out.readings.total)
            for (const { value } of readings) expect(value === null || Number.isFinite(value)).toBe(true)
          },
        ),
        runs(40, 20261111),
      )
    },
    RUN_TIMEOUT_MS,
  )
})
