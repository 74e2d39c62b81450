import { describe, expect, it } from 'vitest'
import { NL_E, NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { countLines, fixture, readFlat, sumOfOutcomes } from '#tests/fixtures/night-files/read.ts'

describe('the western night file', () => {
  it('reads decimal commas in mbar as pascals, in site time', async () => {
    const file = fixture('nl-w-night.csv')
    const { out, readings } = await readFlat(file, NL_W)
    expect(out.state).toBe('readable')
    expect(out.dialect).toMatchObject({
      separator: ';',
      decimalMark: ',',
      layout: 'wide',
      unit: 'mbar',
      unitFrom: 'note',
      zone: 'Europe/Vienna',
    })
    expect(out.lines).toMatchObject({ header: 1, note: 1, accepted: 145, flagged: 0, skipped: 0 })
    expect(out.lines.total).toBe(countLines(file))
    expect(sumOfOutcomes(out)).toBe(countLines(file))
    const last = readings.filter(({ channel }) => channel === 'HC-01B').at(-1)
    // 1 mbar is 100 Pa by definition of the bar; 06:00 in Vienna is 05:00 UTC in November.
    expect(last?.value).toBeCloseTo(5.1e-8, 20)
    expect(last).toMatchObject({ at: '2026-11-09T05:00:00.000Z', quality: 'good', line: 147 })
  })

  it('turns words, bounds and blanks into quality codes and never into numbers', async () => {
    const { readings } = await readFlat(fixture('nl-w-night.csv'), NL_W)
    const at = (channel: string, line: number) =>
      readings.find((reading) => reading.channel === channel && reading.line === line)
    expect(at('HC-01A', 6)).toMatchObject({ value: null, quality: 'over-range' })
    expect(at('HC-01A', 6)?.bound).toBeCloseTo(1, 12)
    expect(at('HC-01A', 8)).toMatchObject({ value: null, bound: null, quality: 'no-signal' })
    expect(at('HC-01B', 10)).toMatchObject({ value: null, quality: 'no-signal' })
    expect(at('CC-01', 3)).toMatchObject({ value: null, quality: 'off' })
  })

  it('tells the two passes through the repeated hour apart and follows columns that change places', async () => {
    const file = fixture('nl-w-repeated-hour.csv')
    const { out, readings } = await readFlat(file, { ...NL_W, expectedPeriodSeconds: 60 })
    expect(out.lines).toMatchObject({
      directive: 1,
      note: 1,
      header: 2,
      accepted: 4,
      flagged: 0,
      skipped: 1,
      total: 9,
    })
    expect(out.lines.total).toBe(countLines(file))
    expect(out.lines.skippedBy).toEqual({ 'partial-last-line': 1 })
    const a = readings.filter(({ channel }) => channel === 'HC-03A')
    expect(a.map(({ at }) => at)).toEqual([
      '2026-10-25T00:59:30.000Z',
      '2026-10-25T01:00:30.000Z',
      '2026-10-25T01:01:30.000Z',
      '2026-10-25T01:02:30.000Z',
    ])
    expect(a.at(-1)?.value).toBeCloseTo(6.0e-8, 20)
    expect(readings.filter(({ channel }) => channel === 'HC-03B').at(-1)?.value).toBeCloseTo(4.8e-8, 20)
    expect(out.restarts).toEqual([{ line: 7, reordered: true }])
  })

  it('gives the same readings whatever the size of the pieces', async () => {
    const whole = await readFlat(fixture('nl-w-night.csv'), NL_W)
    for (const size of [1, 7, 64, 1000]) {
      const cut = await readFlat(fixture('nl-w-night.csv'), NL_W, {}, size)
      expect(cut.readings).toEqual(whole.readings)
      expect(cut.out).toEqual(whole.out)
    }
  })

  it('asks when the file names another unit than the profile, with both meanings of the first values', async () => {
    const text = new TextDecoder().decode(fixture('nl-w-night.csv')).replace('mbar', 'Torr')
    const { out, readings } = await readFlat(text, NL_W)
    expect(out.state).toBe('needs-answers')
    expect(readings).toEqual([])
    expect(out.questions[0]).toMatchObject({
      id: 'unit',
      blocking: true,
      line: 2,
      choices: [{ value: 'Torr' }, { value: 'mbar' }],
    })
    // 7.0 × 10⁻¹⁰ Torr, at 101325/760 Pa a Torr, is 9.33 × 10⁻⁸ Pa.
    expect(out.questions[0]?.choices[0]?.candidates[0]).toEqual({
      line: 3,
      text: '7,0E-10',
      meaning: '9.33 × 10⁻⁸ Pa',
    })
    expect(out.lines.total).toBe(countLines(text))
    const answered = await readFlat(text, NL_W, { answers: [{ id: 'unit', choice: 'mbar' }] })
    expect(answered.out.state).toBe('readable')
    expect(answered.readings.filter(({ channel }) => channel === 'HC-01B').at(-1)?.value).toBeCloseTo(
      5.1e-8,
      20,
    )
  })

  it('leaves out unknown columns and asks about them', async () => {
    const channels = ['HC-01A', 'HC-01B'].map((name) => ({ name, quantity: 'pressure' as const }))
    const { out, readings } = await readFlat(fixture('nl-w-night.csv'), NL_W, { channels })
    expect(out.state).toBe('readable')
    expect(new Set(readings.map(({ channel }) => channel))).toEqual(new Set(['HC-01A', 'HC-01B']))
    expect(out.questions).toMatchObject([
      { id: 'unknown-channel:CC-01', blocking: false, line: 1, column: 4 },
    ])
  })
})

describe('the eastern night file', () => {
  it('takes epochs as UTC, maps status words, keeps differing readings of one instant', async () => {
    const file = fixture('nl-e-words.csv')
    const channels = [{ name: 'HC-16A', quantity: 'pressure' as const }]
    const { out, readings } = await readFlat(file, NL_E, { channels })
    expect(readings).toEqual([
      {
        channel: 'HC-16A',
        at: '2026-11-09T06:00:00.000Z',
        seq: 0,
        value: 3.4e-7,
        bound: null,
        quality: 'good',
        marks: [],
        line: 2,
      },
      {
        channel: 'HC-16A',
        at: '2026-11-09T06:01:00.000Z',
        seq: 0,
        value: null,
        bound: 0.01,
        quality: 'over-range',
        marks: ['conflict'],
        line: 3,
      },
      {
        channel: 'HC-16A',
        at: '2026-11-09T06:01:00.000Z',
        seq: 1,
        value: 3.4e-7,
        bound: null,
        quality: 'good',
        marks: ['conflict'],
        line: 4,
      },
      {
        channel: 'HC-16A',
        at: '2026-11-09T06:02:00.000Z',
        seq: 0,
        value: null,
        bound: null,
        quality: 'off',
        marks: [],
        line: 5,
      },
    ])
    expect(out.lines).toMatchObject({
      header: 1,
      accepted: 3,
      flagged: 1,
      skipped: 1,
      skippedBy: { 'unknown-channel': 1 },
    })
    expect(out.lines.total).toBe(countLines(file))
    expect(out.rejected).toMatchObject([{ line: 6, column: 2, found: '“hc-99z”', wholeLine: true }])
    expect(out.questions).toMatchObject([{ id: 'unknown-channel:hc-99z', blocking: false }])
  })

  it('keeps one of two equal rows', async () => {
    const text =
      'epoch_ms,channel,value,unit,status\n1794204000000,A,1e-7,Pa,OK\n1794204000000,A,1e-7,Pa,OK\n'
    const { out, readings } = await readFlat(text, NL_E)
    expect(readings).toHaveLength(1)
    expect(out.lines).toMatchObject({ accepted: 1, skipped: 1, skippedBy: { duplicate: 1 }, total: 3 })
  })
})
