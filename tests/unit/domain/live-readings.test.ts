import { describe, expect, it } from 'vitest'
import { readPost } from '#app/domain/live-readings.ts'
import { MARKS, type Quantity, qualityCode } from '#app/domain/readings.ts'
import { POST_LIMITS, parsePost, readDateTime } from '#app/domain/schemas/live-readings.ts'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'

const NOW = Date.parse('2026-11-09T07:00:00Z')
const AT = '2026-11-09T07:55:00+01:00'

function channel(name: string, quantity: Quantity, ignored = false) {
  return { name, quantity, ignored }
}

const RULES = {
  channels: [
    channel('TH-05-01', 'temperature'),
    channel('HC-01A', 'pressure'),
    channel('HX-1-I', 'current'),
    channel('BF-01', 'switch'),
    channel('SPARE', 'voltage', true),
  ],
  profile: SourceProfileSchema.parse({
    sentinels: [{ value: 9.9e9, quality: 'over-range' }],
    words: { aus: 'off' },
  }),
  nowMs: NOW,
}

function post(readings: unknown) {
  const parsed = parsePost({ readings })
  if (!parsed.ok) return parsed
  return readPost(parsed.readings, RULES, 100)
}

/** The stored readings of a post that was fine. */
function stored(readings: unknown) {
  const result = post(readings)
  if (!result.ok || !('batches' in result)) throw new Error(`refused: ${JSON.stringify(result)}`)
  return result.batches.flatMap((batch) =>
    Array.from({ length: batch.count }, (_, i) => ({
      channel: result.channels[batch.channel[i] as number]?.name,
      atMs: batch.atMs[i],
      value: batch.value[i],
      bound: batch.bound[i],
      quality: batch.quality[i],
      marks: batch.marks[i],
      seq: batch.seq[i],
      line: batch.line[i],
    })),
  )
}

function faults(readings: unknown) {
  const result = post(readings)
  return result.ok ? [] : result.faults
}

describe('instants', () => {
  it.each([
    ['2026-11-09T08:05:00+01:00', '2026-11-09T07:05:00.000Z'],
    ['2026-11-09T07:05:00Z', '2026-11-09T07:05:00.000Z'],
    ['2026-11-09t07:05:00.123456z', '2026-11-09T07:05:00.123Z'],
    ['2026-11-08T23:35:00.5-07:30', '2026-11-09T07:05:00.500Z'],
  ])('%s', (text, instant) => {
    expect(new Date(readDateTime(text) ?? Number.NaN).toISOString()).toBe(instant)
  })

  it.each([
    '2026-11-09T08:05:00',
    '2026-11-09 08:05:00Z',
    '2026-02-29T08:05:00Z',
    '2026-11-09T24:00:00Z',
    '2026-11-09T08:60:00Z',
    '2026-11-09T08:05Z',
    '2026-11-09T08:05:00+24:00',
    '09.11.2026 08:05',
  ])('refuses %s', (text) => {
    expect(readDateTime(text)).toBeNull()
  })
})

describe('readings that are taken', () => {
  it('carry the number of their place in the list as line, and the unit of their quantity', () => {
    expect(
      stored([
        { channel: 'TH-05-01', at: AT, value: 149.6 },
        { channel: 'hc 01a', at: AT, value: 5.1e-10, unit: 'mbar' },
        { channel: 'TH-05-01', at: '2026-11-09T07:50:00+01:00', value: 302, unit: '°F' },
      ]),
    ).toMatchObject([
      { channel: 'TH-05-01', value: 149.6, line: 1, quality: qualityCode('good'), atMs: Date.parse(AT) },
      // 1 mbar is 100 Pa by definition of the bar.
      { channel: 'HC-01A', value: 5.1e-10 * 100, line: 2 },
      // 302 °F is 150 °C.
      { channel: 'TH-05-01', value: expect.closeTo(150, 9), line: 3 },
    ])
  })

  it('follow the rules of log files for words, bounds, nothing and what cannot be', () => {
    const rows = stored([
      { channel: 'HX-1-I', at: AT, value: 'AUS' },
      { channel: 'HC-01A', at: AT, value: '>1e-2' },
      { channel: 'TH-05-01', at: AT, value: null },
      { channel: 'TH-05-01', at: '2026-11-09T07:50:00+01:00', value: 1372 },
      { channel: 'HC-01A', at: '2026-11-09T07:50:00+01:00', value: 0 },
      { channel: 'HC-01A', at: '2026-11-09T07:45:00+01:00', value: 3e-7, status: 'STARTING' },
      { channel: 'HC-01A', at: '2026-11-09T07:40:00+01:00', value: 9.9e9 },
      { channel: 'BF-01', at: AT, value: 'ON' },
    ])
    expect(rows.map(({ value, bound, quality }) => [value, bound, quality])).toEqual([
      [Number.NaN, Number.NaN, qualityCode('off')],
      [Number.NaN, 0.01, qualityCode('over-range')],
      [Number.NaN, Number.NaN, qualityCode('no-signal')],
      [1372, Number.NaN, qualityCode('fault')],
      [0, Number.NaN, qualityCode('suspect')],
      [3e-7, Number.NaN, qualityCode('starting')],
      [Number.NaN, Number.NaN, qualityCode('over-range')],
      [1, Number.NaN, qualityCode('good')],
    ])
  })

  it('are suspect when dated more than five minutes ahead', () => {
    const [ahead, near] = stored([
      { channel: 'TH-05-01', at: '2026-11-09T07:05:01Z', value: 150 },
      { channel: 'TH-05-01', at: '2026-11-09T07:05:00Z', value: 150 },
    ])
    expect([ahead?.quality, near?.quality]).toEqual([qualityCode('suspect'), qualityCode('good')])
  })

  it('are kept once when repeated, side by side and marked when they differ, left out when the register says so', () => {
    const one = { channel: 'TH-05-01', at: AT, value: 150 }
    const result = post([one, one, { ...one, value: 151 }, { channel: 'SPARE', at: AT, value: 1 }])
    if (!result.ok || !('readOut' in result)) throw new Error('refused')
    expect(result.readOut.lines).toMatchObject({
      accepted: 1,
      flagged: 1,
      skipped: 2,
      total: 4,
      skippedBy: { duplicate: 1, 'left-out': 1 },
    })
    expect(stored([one, one, { ...one, value: 151 }]).map(({ seq, marks }) => [seq, marks])).toEqual([
      [0, MARKS.conflict],
      [1, MARKS.conflict],
    ])
  })
})

describe('posts that are refused', () => {
  it.each([
    [{ channel: 'HC-99Z', at: AT, value: 1 }, 'channel', '"HC-99Z"'],
    [{ channel: 'HC-01A', at: '2026-11-09T08:05:00', value: 1 }, 'at', '"2026-11-09T08:05:00"'],
    [{ channel: 'HC-01A', at: '1970-01-01T00:00:00Z', value: 1 }, 'at', '"1970-01-01T00:00:00Z"'],
    [{ channel: 'HC-01A', at: AT, value: '3,2E-8' }, 'value', '"3,2E-8"'],
    [{ channel: 'HC-01A', at: AT, value: 'WOBBLE' }, 'value', '"WOBBLE"'],
    [{ channel: 'HC-01A', at: AT, value: '3 furlong' }, 'value', '"3 furlong"'],
    [{ channel: 'HC-01A', at: AT, value: true }, 'value', 'true'],
    [{ channel: 'HC-01A', at: AT }, 'value', 'nothing'],
    [{ channel: 'HC-01A', at: AT, value: 1, unit: '°C' }, 'unit', '"°C"'],
    [{ channel: 'HC-01A', at: AT, value: 1, unit: 'psig' }, 'unit', '"psig"'],
    [{ channel: 'HC-01A', at: AT, value: 1, status: 'hm' }, 'status', '"hm"'],
    [{ channel: 'BF-01', at: AT, value: 2 }, 'value', '2'],
    [{ channel: 'HC-01A', at: AT, value: 1, colour: 'red' }, 'colour', 'a field of this name'],
    ['5', 'readings', '"5"'],
  ])('%j', (bad, field, found) => {
    const good = { channel: 'TH-05-01', at: AT, value: 150 }
    expect(faults([good, bad])).toEqual([
      { index: 1, field, found, expected: expect.stringMatching(/./), mend: expect.stringMatching(/\.$/) },
    ])
  })

  it('keep nothing of the good readings and count all faults beyond those named', () => {
    const result = post(Array.from({ length: 60 }, () => ({ channel: 'NO', at: AT, value: 1 })))
    expect(result).toMatchObject({ ok: false, total: 60 })
    expect(result.ok ? [] : result.faults).toHaveLength(POST_LIMITS.faults)
  })

  it.each([[null], [[]], [{ readings: [] }], [{ readings: 'x' }]])('whole: %j', (body) => {
    expect(parsePost(body)).toMatchObject({ ok: false, faults: [{ index: null }] })
  })

  it('with a field that does not belong there', () => {
    const result = parsePost({ readings: [{ channel: 'A', at: AT, value: 1 }], more: 1 })
    expect(result).toMatchObject({ ok: false, total: 1, faults: [{ index: null, field: 'more' }] })
  })

  it('too many readings', () => {
    const many = Array.from({ length: POST_LIMITS.readings + 1 }, () => ({ channel: 'A', at: AT, value: 1 }))
    expect(parsePost({ readings: many })).toMatchObject({
      ok: false,
      total: 1,
      faults: [{ found: 'a list of 10001' }],
    })
  })
})
