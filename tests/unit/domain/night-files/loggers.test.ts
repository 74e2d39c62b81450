import { describe, expect, it } from 'vitest'
import { NL_P, NL_R, NL_T } from '#tests/fixtures/night-files/profiles.ts'
import { countLines, readFlat, sumOfOutcomes } from '#tests/fixtures/night-files/read.ts'

const MASSES = ['02', '04', '18', '28', '32', '40', '44']
const GAS_CHANNELS = MASSES.map((mass) => ({ name: `RG-A-${mass}`, quantity: 'ion-current' as const }))

function gasFile(start: string | null): string {
  return [
    '# RG-A at the cross   Unit: A',
    ...(start === null ? [] : [`# Start: ${start}`]),
    'elapsed_s,2,4,18,28,32,40,44',
    '600,6.3e-14,3e-17,3.2e-16,1.9e-13,4.0e-14,2.0e-14,8.8e-16',
    '1200,6.4e-14,3e-17,3.3e-16,2.0e-13,4.1e-14,2.1e-14,9.4e-16',
    '',
  ].join('\r\n')
}

describe('the residual-gas logger', () => {
  it('counts its seconds from the start in the note, on the clock of the source', async () => {
    const { out, readings } = await readFlat(gasFile('2026-11-07 06:00:00'), NL_R, { channels: GAS_CHANNELS })
    expect(out.state).toBe('readable')
    expect(out.questions).toEqual([])
    expect(readings).toHaveLength(14)
    // 06:00 in Vienna is 05:00 UTC in November; ten minutes later the first row.
    expect(readings[0]).toMatchObject({
      channel: 'RG-A-02',
      at: '2026-11-07T05:10:00.000Z',
      value: 6.3e-14,
      quality: 'good',
      marks: [],
    })
    expect(out.columns[1]).toMatchObject({ inFile: '2', channel: 'RG-A-02', unit: 'A' })
  })

  it('asks for the start when the clock of the logger had fallen back to 2000, and never stores that year', async () => {
    const file = gasFile('2000-01-01 00:00:00')
    const { out, readings } = await readFlat(file, NL_R, {
      channels: GAS_CHANNELS,
      previousEndMs: Date.UTC(2026, 10, 2, 5),
    })
    expect(out.state).toBe('needs-answers')
    expect(readings).toEqual([])
    expect(out.questions).toMatchObject([
      { id: 'start', blocking: true, line: 2, found: '“2000-01-01 00:00:00”', typed: 'time' },
    ])
    expect(out.questions[0]?.choices).toEqual([
      {
        value: '2026-11-02T05:00:00.000Z',
        label: '2026-11-02 06:00:00: where the file taken in before this one ends',
        candidates: [],
      },
    ])
    expect(sumOfOutcomes(out)).toBe(countLines(file))
  })

  it.each(['2026-11-02T05:00:00.000Z', '2026-11-02 06:00', '2026-11-02T06:00'])(
    'takes the start %s from a person and marks every reading as reconstructed',
    async (choice) => {
      const { out, readings } = await readFlat(gasFile('2000-01-01 00:00:00'), NL_R, {
        channels: GAS_CHANNELS,
        answers: [{ id: 'start', choice }],
      })
      expect(out.state).toBe('readable')
      expect(readings[0]).toMatchObject({ at: '2026-11-02T05:10:00.000Z', marks: ['time-reconstructed'] })
      expect(readings.every(({ marks }) => marks.includes('time-reconstructed'))).toBe(true)
    },
  )

  it('asks as well when no start stands anywhere, and proposes the time in the name of the file', async () => {
    const { out } = await readFlat(gasFile(null), NL_R, {
      channels: GAS_CHANNELS,
      fileName: 'rga_20261107_060000.csv',
    })
    expect(out.questions).toMatchObject([
      { id: 'start', choices: [{ value: '2026-11-07T05:00:00.000Z' }], line: 2 },
    ])
  })

  it('asks about every mass of a source of which nothing has been confirmed', async () => {
    const { out, readings } = await readFlat(gasFile('2026-11-07 06:00:00'), null, { channels: GAS_CHANNELS })
    expect(out.state).toBe('needs-answers')
    expect(readings).toEqual([])
    expect(out.questions.map(({ id }) => id)).toEqual([
      'zone',
      ...['2', '4', '18', '28', '32', '40', '44'].map((mass) => `unknown-channel:${mass}`),
    ])
    const answers = [
      { id: 'zone', choice: 'Europe/Vienna' },
      ...MASSES.map((mass) => ({
        id: `unknown-channel:${Number(mass)}`,
        choice: mass === '04' ? 'leave-out' : `RG-A-${mass}`,
      })),
    ]
    const answered = await readFlat(gasFile('2026-11-07 06:00:00'), null, { channels: GAS_CHANNELS, answers })
    expect(answered.out.state).toBe('readable')
    expect(answered.readings).toHaveLength(12)
  })
})

describe('the temperature logger', () => {
  const text = [
    '# Temperature logger   Unit: °C',
    'time\tTH-01-01\tTH-01-02',
    '2026-11-07T06:05:00+01:00\t18.0\t1372.0',
    '2026-11-07T06:10:00+01:00\t18.1\t1372.0',
    '',
  ].join('\r\n')

  it('reads UTF-16 with tabs, and full scale as an open wire without a value', async () => {
    const bytes = Buffer.concat([Buffer.from([0xff, 0xfe]), Buffer.from(text, 'utf16le')])
    const { out, readings } = await readFlat(bytes, NL_T)
    expect(out.state).toBe('readable')
    expect(out.dialect).toMatchObject({ encoding: 'utf-16le', separator: '\t', unit: '°C' })
    expect(readings.slice(0, 2)).toMatchObject([
      { channel: 'TH-01-01', at: '2026-11-07T05:05:00.000Z', value: 18, quality: 'good' },
      { channel: 'TH-01-02', value: null, quality: 'fault' },
    ])
    expect(out.lines).toMatchObject({ note: 1, header: 1, accepted: 2, total: 4 })
  })

  it('keeps full scale as a fault also without a profile that names it', async () => {
    const { readings } = await readFlat(text, { ...NL_T, sentinels: [] })
    expect(readings[1]).toMatchObject({ value: 1372, quality: 'fault' })
  })
})

describe('the power logger', () => {
  const channels = [
    { name: 'HX-1-U', quantity: 'voltage' as const },
    { name: 'HX-1-I', quantity: 'current' as const },
    { name: 'EM-W', quantity: 'energy' as const },
    { name: 'IP-01', quantity: 'ion-current' as const },
    { name: 'BF-01', quantity: 'switch' as const },
  ]
  const text = [
    'time,HX-1-U (V),HX-1-I (A),EM-W (kWh),IP-01 (A),BF-01',
    '2026-11-07T06:05:00+01:00,23.3,1084,999998,1.32e-07,on',
    '2026-11-07T06:10:00+01:00,OFF,OFF,000004,OFF,off',
    '',
  ].join('\n')

  it('reads each column in its own unit, switches as 1 and 0, and a supply that is off as no number', async () => {
    const { out, readings } = await readFlat(text, NL_P, { channels })
    expect(out.state).toBe('readable')
    expect(readings.map(({ channel, value, quality }) => [channel, value, quality])).toEqual([
      ['HX-1-U', 23.3, 'good'],
      ['HX-1-I', 1084, 'good'],
      ['EM-W', 999998, 'good'],
      ['IP-01', 1.32e-7, 'good'],
      ['BF-01', 1, 'good'],
      ['HX-1-U', null, 'off'],
      ['HX-1-I', null, 'off'],
      ['EM-W', 4, 'good'],
      ['IP-01', null, 'off'],
      ['BF-01', 0, 'good'],
    ])
  })

  it('says that a meter began again, and keeps what it showed', async () => {
    const { out } = await readFlat(text, NL_P, { channels })
    expect(out.remarks).toMatchObject([{ kind: 'meter-restart', channel: 'EM-W', count: 1, line: 3 }])
  })
})
