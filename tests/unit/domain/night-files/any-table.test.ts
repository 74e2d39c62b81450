import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { splitFields } from '#app/domain/night-files/fields.ts'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { countLines, readFlat, sumOfOutcomes } from '#tests/fixtures/night-files/read.ts'
import { RUN_TIMEOUT_MS, runs } from '#tests/fixtures/night-files/runs.ts'

const two = (value: number) => String(value).padStart(2, '0')

/** Ways to write an instant as UTC; `question`: the reader may ask for the order where no day is above twelve. */
const TIMES: Record<string, (at: Date) => string> = {
  iso: (at) => at.toISOString().replace('.000Z', 'Z'),
  'epoch-ms': (at) => String(at.getTime()),
  'epoch-s': (at) => String(at.getTime() / 1000),
  dmy: (at) => `${two(at.getUTCDate())}.${two(at.getUTCMonth() + 1)}.${at.getUTCFullYear()} ${clock(at)}`,
  mdy: (at) => `${two(at.getUTCMonth() + 1)}/${two(at.getUTCDate())}/${at.getUTCFullYear()} ${clock(at)}`,
  ymd: (at) => `${at.getUTCFullYear()}-${two(at.getUTCMonth() + 1)}-${two(at.getUTCDate())} ${clock(at)}`,
}

function clock(at: Date): string {
  return `${two(at.getUTCHours())}:${two(at.getUTCMinutes())}:${two(at.getUTCSeconds())}`
}

/** A number as text, with whatever blanks stand in its exponent. */
const FIGURE = /(?:\d+\.?\d*|\.\d+)(?:\s*[eEdD]\s*[+-]?\s*\d+)?/g

const UNITS: Record<string, number> = { Pa: 1, mbar: 100, Torr: 101325 / 760, kPa: 1000 }

const table = fc.record({
  separator: fc.constantFrom(',', ';', '\t', '|'),
  comma: fc.boolean(),
  time: fc.constantFrom(...(Object.keys(TIMES) as (keyof typeof TIMES)[])),
  unit: fc.constantFrom(...Object.keys(UNITS)),
  unitAt: fc.constantFrom('header', 'note', 'cell'),
  layout: fc.constantFrom('wide', 'long'),
  lineEnd: fc.constantFrom('\n', '\r\n'),
  encoding: fc.constantFrom('utf-8', 'bom', 'utf-16le'),
  lastEnd: fc.boolean(),
  /** Columns with the lowest and highest value of P1, which are no readings. */
  bounds: fc.boolean(),
  startMinute: fc.integer({ min: 0, max: 500_000 }),
  rows: fc.array(
    fc.array(
      fc.oneof(
        fc.record({ mantissa: fc.integer({ min: 100, max: 999 }), power: fc.integer({ min: -9, max: -1 }) }),
        fc.constantFrom('OFF', 'OVER', ''),
      ),
      { minLength: 2, maxLength: 2 },
    ),
    { minLength: 2, maxLength: 40 },
  ),
})

type Table = typeof table extends fc.Arbitrary<infer T> ? T : never

/** The file of a table, and its readings as channel, instant, value, quality. */
function write(one: Table): { bytes: Uint8Array; readings: [string, string, number | null, string][] } {
  const separator = one.separator
  // Commas between fields leave no room for commas in numbers.
  const comma = one.comma && separator !== ','
  const unitAt = one.unitAt
  const number = (mantissa: number, power: number) => {
    const text = `${(mantissa / 100).toFixed(2)}E${power}`
    return comma ? text.replace('.', ',') : text
  }
  const named = (name: string) => (unitAt === 'header' ? `${name} (${one.unit})` : name)
  const lines = unitAt === 'note' ? [`# Unit: ${one.unit}`] : []
  const readings: [string, string, number | null, string][] = []
  const bounds = one.bounds && one.layout === 'wide'
  lines.push(
    one.layout === 'wide'
      ? ['time', ...(bounds ? ['P1 min', 'P1', 'P1 max', 'P2'] : ['P1', 'P2']).map(named)].join(separator)
      : ['time', 'channel', named('value')].join(separator),
  )
  one.rows.forEach((cells, i) => {
    const at = new Date(Date.UTC(2025, 9, 13) + (one.startMinute + i) * 60_000)
    const time = (TIMES[one.time] as (at: Date) => string)(at)
    const texts = cells.map((cell, j) => {
      const channel = `P${j + 1}`
      if (typeof cell === 'string') {
        const quality = cell === 'OFF' ? 'off' : cell === 'OVER' ? 'over-range' : 'no-signal'
        readings.push([channel, at.toISOString(), null, quality])
        return cell
      }
      const value =
        Number(`${(cell.mantissa / 100).toFixed(2)}E${cell.power}`) * (UNITS[one.unit] ?? Number.NaN)
      readings.push([channel, at.toISOString(), value, 'good'])
      return `${number(cell.mantissa, cell.power)}${unitAt === 'cell' ? ` ${one.unit}` : ''}`
    })
    if (bounds) texts.splice(0, 1, number(100, -12), texts[0] ?? '', number(999, 2))
    if (one.layout === 'wide') lines.push([time, ...texts].join(separator))
    else lines.push(...texts.map((text, j) => [time, `P${j + 1}`, text].join(separator)))
  })
  const text = lines.join(one.lineEnd) + (one.lastEnd ? one.lineEnd : '')
  const bytes =
    one.encoding === 'utf-16le'
      ? Buffer.from(`\ufeff${text}`, 'utf16le')
      : new TextEncoder().encode(one.encoding === 'bom' ? `\ufeff${text}` : text)
  return { bytes, readings }
}

/** What a person has confirmed about such a source: what the file cannot show. */
function profileOf(one: Table) {
  return SourceProfileSchema.parse({
    decimalMark: one.comma && one.separator !== ',' ? ',' : '.',
    time: { format: one.time, zone: 'UTC' },
    basis: { kind: 'nitrogen-equivalent' },
    averaging: 'mean',
  })
}

const REGISTERED = { channels: ['P1', 'P2'].map((name) => ({ name, quantity: 'pressure' as const })) }

describe('any table in any dialect', () => {
  it(
    'reads back to the same instants and values',
    async () => {
      await fc.assert(
        fc.asyncProperty(table, fc.integer({ min: 1, max: 400 }), async (one, piece) => {
          const numbers = one.rows.flat().filter((cell) => typeof cell !== 'string').length
          // Units that stand in cells need a cell that holds one among the first rows.
          fc.pre(numbers > 0)
          const { bytes, readings } = write(one)
          const { out, readings: read } = await readFlat(bytes, profileOf(one), REGISTERED, piece)
          expect(out.state).toBe('readable')
          expect(out.questions).toEqual([])
          expect(out.remarks.map(({ kind }) => kind)).not.toContain('outside-bounds')
          const expected = new Map(readings.map(([channel, at, ...rest]) => [`${channel} ${at}`, rest]))
          expect(read).toHaveLength(expected.size)
          for (const { channel, at, value, quality } of read) {
            const [wanted, word] = expected.get(`${channel} ${at}`) ?? [Number.NaN, 'nothing']
            expect(quality).toBe(word)
            if (wanted === null) expect(value).toBeNull()
            else expect(Math.abs((value ?? Number.NaN) - wanted)).toBeLessThanOrEqual(1e-12 * wanted)
          }
        }),
        runs(120, 20261109),
      )
    },
    RUN_TIMEOUT_MS,
  )
})

describe('any damage to any table', () => {
  it(
    'ends, throws nothing, adds up, and brings no reading that is not in the file',
    async () => {
      const edit = fc.record({
        at: fc.nat(4000),
        kind: fc.constantFrom('change', 'remove', 'repeat'),
        byte: fc.integer({ min: 0, max: 255 }),
        length: fc.integer({ min: 1, max: 60 }),
      })
      await fc.assert(
        fc.asyncProperty(table, fc.array(edit, { minLength: 1, maxLength: 8 }), async (one, edits) => {
          let bytes = write({ ...one, encoding: 'utf-8', lineEnd: '\n' }).bytes
          for (const { at, kind, byte, length } of edits) {
            const from = at % bytes.length
            const before = bytes.subarray(0, from)
            const part = bytes.subarray(from, from + length)
            const after = bytes.subarray(from + length)
            // No CR comes in, so that counting LF counts lines.
            if (kind === 'change') bytes[from] = byte === 13 ? 12 : byte
            else bytes = Buffer.concat(kind === 'remove' ? [before, after] : [before, part, part, after])
            if (bytes.length === 0) return
          }
          const { out, readings } = await readFlat(bytes, profileOf(one), REGISTERED)
          expect(sumOfOutcomes(out)).toBe(out.lines.total)
          if (out.dialect.encoding === 'utf-8' || out.dialect.encoding === 'windows-1252')
            expect(out.lines.total).toBe(countLines(bytes))
          expect(readings).toHaveLength(out.readings.total)
          const lines = Buffer.from(bytes).toString('latin1').split('\n')
          for (const { line, value, bound } of readings)
            for (const figure of [value, bound]) {
              if (figure === null) continue
              // The digits of every value stand in the line that it is said to come from.
              const text = lines[line - 1] ?? ''
              // A comma may part fields or stand before decimals.
              const figures = [text, text.replaceAll(',', '.')].flatMap((way) => way.match(FIGURE) ?? [])
              const written = figures.map((one) => Number(one.replace(/\s/g, '').replace(/[dD]/, 'e')))
              const units = Object.values(UNITS).concat([100, 1e-3, 1e-6, 0.1, 1e5, 1e6])
              const stands = written.some((number) =>
                units.some((unit) => Math.abs(Math.abs(figure) - number * unit) <= 1e-9 * Math.abs(figure)),
              )
              expect(stands, `${figure} in ${text}`).toBe(true)
            }
        }),
        runs(120, 20261110),
      )
    },
    RUN_TIMEOUT_MS,
  )
})

describe('the examples of RFC 4180, section 2', () => {
  // Texts and meaning from RFC 4180 section 2, rules 5 to 7 (from memory, not verified against the page).
  it.each([
    ['aaa,bbb,ccc', ['aaa', 'bbb', 'ccc']],
    ['"aaa","bbb","ccc"', ['aaa', 'bbb', 'ccc']],
    ['"aaa","b\r\nbb","ccc"', ['aaa', 'b\r\nbb', 'ccc']],
    ['"aaa","b""bb","ccc"', ['aaa', 'b"bb', 'ccc']],
    [' aaa , bbb,', [' aaa ', ' bbb', '']],
  ])('%j', (record, fields) => {
    expect(splitFields(record, ',')).toEqual({ kind: 'fields', fields })
  })

  it('a last record may lack its line end, and a header is one record more', async () => {
    const text = 'time,P1 (Pa)\r\n2026-11-08T06:00:00Z,1E-8\r\n2026-11-08T06:10:00Z,2E-8'
    const profile = SourceProfileSchema.parse({ basis: { kind: 'nitrogen-equivalent' } })
    const { out, readings } = await readFlat(text, profile)
    expect(out.lines).toMatchObject({ header: 1, accepted: 2, total: 3 })
    expect(readings).toHaveLength(2)
  })
})
