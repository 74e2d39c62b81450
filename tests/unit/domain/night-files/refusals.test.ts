import { describe, expect, it } from 'vitest'
import type { RefusalCode } from '#app/domain/night-files/types.ts'
import { NL_E, NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { countLines, fixture, readFlat, sumOfOutcomes } from '#tests/fixtures/night-files/read.ts'

const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))
const registered = ['HC-01A', 'HC-01B', 'CC-01'].map((name) => ({ name, quantity: 'pressure' as const }))
const HEADER = 'Zeit;HC-01A;HC-01B;CC-01'

const BAD: [RefusalCode, string, string | Uint8Array, number | null, number | null][] = [
  ['empty-file', 'no bytes', '', null, null],
  ['empty-file', 'blank lines only', '\n\n  \n', null, null],
  ['header-only', 'a header and nothing else', `${HEADER}\n# Einheit: mbar\n`, 1, null],
  [
    'not-a-log',
    'a saved sign-in page',
    '<!doctype html><html><form><input type="password"></form></html>\n',
    1,
    1,
  ],
  ['not-a-log', 'JSON', '{"readings": [1, 2, 3]}\n', 1, 1],
  ['not-a-log', 'prose', 'Dear colleague\nthe gauge is fine\n', 1, 1],
  ['binary-file', 'a picture', Uint8Array.from([0x89, 0x50, 0x4e, 0x47, 13, 10, 26, 10, 0, 0]), null, null],
  ['archive', 'a zip', Uint8Array.from([0x50, 0x4b, 3, 4, 20, 0, 0, 0, 8, 0, 65, 66]), null, null],
  ['archive', 'a gzip', Uint8Array.from([0x1f, 0x8b, 8, 0, 0, 0, 0, 0]), null, null],
  [
    'spreadsheet-file',
    'an old office file',
    Uint8Array.from([0xd0, 0xcf, 0x11, 0xe0, 0xa1, 0xb1, 0x1a, 0xe1]),
    null,
    null,
  ],
  [
    'no-known-channel',
    'channels of somewhere else',
    'Zeit;XX-1;XX-2\n# Einheit: mbar\n08.11.2026 06:00:00;1,0E-8;1,0E-8\n',
    1,
    2,
  ],
  ['too-long-line', 'a million characters without a line end', 'x'.repeat(1_100_000), 1, null],
  ['no-rows', 'times that are none', `${HEADER}\n# Einheit: mbar\nyesterday;1,0E-8;1,0E-8;1,0E-8\n`, 3, 1],
  ['no-unit', 'the unit struck out', night().replace('   Einheit: mbar', ''), 3, 2],
]

describe('files that cannot be read', () => {
  it.each(BAD)('%s: %s', async (code, _, input, line, column) => {
    const { out, readings } = await readFlat(input, NL_W, { channels: registered })
    expect(out.state).toBe('refused')
    expect(out.refusal).toMatchObject({ code, line, column })
    expect(readings).toEqual([])
    for (const part of ['found', 'expected', 'mend'] as const) expect(out.refusal?.[part]).not.toBe('')
    expect(out.lines.accepted + out.lines.flagged).toBe(0)
    expect(sumOfOutcomes(out)).toBe(out.lines.total)
    expect(out.lines.total).toBe(countLines(input))
  })

  it('says what stood in the cell that has no unit', async () => {
    const { out } = await readFlat(night().replace('   Einheit: mbar', ''), NL_W)
    expect(out.refusal?.found).toContain('under “HC-01A”')
    expect(out.refusal?.expected).toContain('mbar')
  })

  it('refuses a long file whose channels all belong elsewhere, naming the first', async () => {
    const { out } = await readFlat(fixture('nl-e-words.csv'), NL_E, { channels: registered })
    expect(out.refusal).toMatchObject({ code: 'no-known-channel', line: 2, column: 2 })
    expect(out.refusal?.found).toContain('hc-16a')
  })
})

describe('lines that cannot be read in a file that can', () => {
  const rows = (...lines: string[]) =>
    `${HEADER}\n# Einheit: mbar\n08.11.2026 06:00:00;1,0E-8;1,0E-8;1,0E-8\n${lines.join('\n')}\n`

  it.each([
    ['field-count', '08.11.2026 06:10:00;1,0E-8;1,0E-8', null],
    ['unreadable-time', '31.11.2026 06:10:00;1,0E-8;1,0E-8;1,0E-8', 1],
    ['nonexistent-time', '29.03.2026 02:30:00;1,0E-8;1,0E-8;1,0E-8', 1],
    ['clock-reset', '01.01.2000 00:00:10;1,0E-8;1,0E-8;1,0E-8', 1],
    ['broken-quote', '08.11.2026 06:10:00;"1,0E-8;1,0E-8;1,0E-8', null],
    ['damaged', '08.11.2026\u0000 06:10:00;1,0E-8;1,0E-8;1,0E-8', null],
  ] as const)('%s', async (code, line, column) => {
    const text = rows(line, '08.11.2026 06:20:00;1,0E-8;1,0E-8;1,0E-8')
    const { out, readings } = await readFlat(text, NL_W, { channels: registered })
    expect(out.rejected).toMatchObject([{ code, line: 4, column, wholeLine: true }])
    expect(readings).toHaveLength(6)
    expect(out.lines).toMatchObject({
      accepted: 2,
      skipped: 1,
      skippedBy: { [code]: 1 },
      total: countLines(text),
    })
  })

  it('rejects a cut number alone and reads the rest of its line', async () => {
    const text = rows('08.11.2026 06:10:00;3,2E-;1,0E-8;SPARK')
    const { out, readings } = await readFlat(text, NL_W, { channels: registered })
    expect(out.rejected).toMatchObject([
      { code: 'unreadable-value', line: 4, column: 2, found: '“3,2E-”', wholeLine: false },
      { code: 'unknown-word', line: 4, column: 4, found: '“SPARK”' },
    ])
    expect(readings.filter(({ line }) => line === 4)).toHaveLength(1)
    expect(out.lines).toMatchObject({ accepted: 1, flagged: 1, skipped: 0 })
    const answered = await readFlat(text, NL_W, { answers: [{ id: 'unknown-word:spark', choice: 'fault' }] })
    expect(answered.readings.filter(({ quality }) => quality === 'fault')).toHaveLength(1)
  })

  it('keeps zero, negative and future pressures as suspect', async () => {
    const text = rows(
      '08.11.2026 06:10:00;0,0E+00;-1,0E-8;1,0E-8',
      '10.11.2026 06:00:00;1,0E-8;1,0E-8;1,0E-8',
    )
    const { out, readings } = await readFlat(text, NL_W, { channels: registered })
    expect(readings.map(({ quality }) => quality)).toEqual([
      'good',
      'good',
      'good',
      'suspect',
      'suspect',
      'good',
      'suspect',
      'suspect',
      'suspect',
    ])
    expect(out.lines).toMatchObject({ accepted: 1, flagged: 2 })
    expect(out.remarks.map(({ kind }) => kind)).toEqual(
      expect.arrayContaining(['zero-or-negative', 'future-times']),
    )
  })

  it('skips totals under the rows', async () => {
    const text = `${rows()}Max;9,0E-8;9,0E-8;9,0E-8\nEnd of log\n`
    const { out, readings } = await readFlat(text, NL_W, { channels: registered })
    expect(readings).toHaveLength(3)
    expect(out.lines.skippedBy).toEqual({ footer: 2 })
  })
})
