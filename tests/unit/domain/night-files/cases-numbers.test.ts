import { describe, expect, it } from 'vitest'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { type Case, check, file } from '#tests/fixtures/night-files/cases.ts'

const ISO = SourceProfileSchema.parse({
  time: { format: 'iso', zone: 'UTC' },
  basis: { kind: 'nitrogen-equivalent' },
})
const DMY = { ...ISO, time: { ...ISO.time, format: 'dmy' as const } }
const AT = '2026-11-08T06:00:00Z'
const LATER = '2026-11-08T06:10:00Z'

function cell(text: string): string {
  return file('time;P1 (Pa)', `${AT};1.5E-08`, `${LATER};${text}`)
}

/** One cell under a pressure channel, and the reading it becomes. */
function reads(text: string, value: number | null, quality: string): Case {
  return {
    name: `${text === '' ? 'a blank cell' : text} is ${quality}`,
    file: cell(text),
    profile: ISO,
    state: 'readable',
    readings: [
      ['P1', AT, 1.5e-8, 'good'],
      ['P1', LATER, value, quality],
    ],
  }
}

const CASES: Record<string, Case[]> = {
  '10 decimal comma between semicolons': [
    {
      name: 'is found over many rows, separator and mark together',
      file: file('Zeit;P1 (Pa);P2 (Pa)', '08.11.2026 06:00;3,2E-8;1,013', '08.11.2026 06:10;3,3E-8;1,014'),
      profile: DMY,
      state: 'readable',
      readings: [
        ['P1', AT, 3.2e-8, 'good'],
        ['P2', AT, 1.013, 'good'],
        ['P1', LATER, 3.3e-8, 'good'],
        ['P2', LATER, 1.014, 'good'],
      ],
    },
    {
      name: 'is asked about where the profile says the point',
      file: file('time;P1 (Pa)', `${AT};3,2E-8`),
      profile: { ...ISO, decimalMark: '.' },
      state: 'needs-answers',
      questions: ['decimal-mark'],
      readings: [],
    },
  ],
  '11 decimal comma and comma between fields': [
    {
      name: 'is read where the number of fields leaves one way only',
      file: file('time,P1 (Pa),P2 (Pa)', `${AT},3,2E-8,4,1E-8`, `${LATER},3,3E-8,4,2E-8`),
      profile: ISO,
      state: 'readable',
      readings: [
        ['P1', AT, 3.2e-8, 'good'],
        ['P2', AT, 4.1e-8, 'good'],
        ['P1', LATER, 3.3e-8, 'good'],
        ['P2', LATER, 4.2e-8, 'good'],
      ],
    },
    {
      name: 'stops where fields can be joined in two ways, and shows both',
      file: file('time,P1 (Pa),P2 (Pa)', `${AT},3,2,4`, `${LATER},3,3,5`),
      profile: ISO,
      state: 'refused',
      refusal: { code: 'no-rows', line: 2 },
      more: (out) => expect(out.refusal?.found).toContain('“3,2 and 4” or as “3 and 2,4”'),
    },
    {
      name: 'is plain where the numbers are quoted',
      file: file('time,P1 (Pa),P2 (Pa)', `${AT},"3,2E-8","4,1E-8"`),
      profile: { ...ISO, decimalMark: ',' },
      state: 'readable',
      readings: [
        ['P1', AT, 3.2e-8, 'good'],
        ['P2', AT, 4.1e-8, 'good'],
      ],
    },
  ],
  '12 marks between thousands': [
    ...(
      [
        ['1.013,25', '.', ','],
        ["1'013,25", "'", ','],
        ['1 013.25', ' ', '.'],
      ] as const
    ).map(
      ([text, thousandsMark, decimalMark]): Case => ({
        name: `${text} is read where the profile names the mark`,
        file: file('time;P1 (Pa)', `${AT};${text}`),
        profile: { ...ISO, thousandsMark, decimalMark },
        state: 'readable',
        readings: [['P1', AT, 1013.25, 'good']],
      }),
    ),
    {
      name: '1.013,25 is turned away where the profile names no mark',
      file: file('time;P1 (Pa)', `${AT};1.013,25`, `${LATER};3,2E-8`),
      profile: ISO,
      state: 'readable',
      rejected: ['2:unreadable-value'],
      readings: [['P1', LATER, 3.2e-8, 'good']],
    },
    {
      name: 'a point that may stand for either stops the file',
      file: file('time;P1 (Pa)', `${AT};1.013`, `${LATER};1.014`),
      profile: ISO,
      state: 'needs-answers',
      questions: ['decimal-mark'],
      readings: [],
    },
    {
      name: 'and is read as decimals once somebody has said so',
      file: file('time;P1 (Pa)', `${AT};1.013`),
      profile: ISO,
      context: { answers: [{ id: 'decimal-mark', choice: '.' }] },
      state: 'readable',
      readings: [['P1', AT, 1.013, 'good']],
    },
  ],
  '13 ways to write an exponent': [
    ...['3.2E-08', '3.2e-8', '3.2D-08', '3.2×10^-8', '3.2·10⁻⁸', '3.2 x 10^-8'].map((text) =>
      reads(text, 3.2e-8, 'good'),
    ),
    {
      ...reads('3.2 E -8', 3.2e-8, 'good'),
      lines: { accepted: 1, flagged: 1 },
      remarks: ['spaced-exponent'],
    },
    {
      name: '3.2-08 is turned away where the profile does not allow it',
      file: cell('3.2-08'),
      profile: ISO,
      state: 'readable',
      rejected: ['3:unreadable-value'],
    },
    {
      name: '3.2-08 is read where the profile says so',
      file: cell('3.2-08'),
      profile: { ...ISO, bareExponent: true },
      state: 'readable',
      readings: [
        ['P1', AT, 1.5e-8, 'good'],
        ['P1', LATER, 3.2e-8, 'good'],
      ],
    },
  ],
  '45 words for over range': [
    ...['OVER', 'OR', 'HI', '+OL'].map((word) => reads(word, null, 'over-range')),
    {
      ...reads('>1E-2', null, 'over-range'),
      more: (_, readings) => expect(readings[1]?.bound).toBe(0.01),
    },
    { ...reads('9.9E+09', 9.9e9, 'suspect'), remarks: ['outside-ceiling'] },
    {
      name: '9.99E9 is over range where the profile says so, and no number',
      file: cell('9.99E9'),
      profile: { ...ISO, sentinels: [{ value: 9.99e9, quality: 'over-range' }] },
      state: 'readable',
      readings: [
        ['P1', AT, 1.5e-8, 'good'],
        ['P1', LATER, null, 'over-range'],
      ],
    },
  ],
  '46 words and numbers for under range': [
    ...['UNDER', 'UR', 'LO'].map((word) => reads(word, null, 'under-range')),
    {
      ...reads('<1E-10', null, 'under-range'),
      more: (_, readings) => expect(readings[1]?.bound).toBe(1e-10),
    },
    {
      name: 'a floor that repeats is asked about and kept as it stands until then',
      file: file('time;P1 (Pa)', ...manyRows(80, () => '1E-11')),
      profile: ISO,
      state: 'readable',
      questions: ['floor:P1'],
      remarks: ['stuck'],
      more: (_, readings) => expect(readings.every(({ quality }) => quality === 'good')).toBe(true),
    },
    {
      name: 'a floor is under range once somebody has said so',
      file: file('time;P1 (Pa)', ...manyRows(80, () => '1E-11')),
      profile: ISO,
      context: { answers: [{ id: 'floor:P1', choice: 'under-range:1e-11' }] },
      state: 'readable',
      more: (_, readings) =>
        expect(readings.every(({ quality, value }) => quality === 'under-range' && value === null)).toBe(
          true,
        ),
    },
  ],
  '47 gauge off and no reading': [
    ...['OFF', 'GAUGE OFF', 'HV OFF'].map((word) => reads(word, null, 'off')),
    ...['---', '****', '', 'NaN', 'N/A'].map((word) => reads(word, null, 'no-signal')),
    reads('9.99', 9.99, 'good'),
    {
      name: '-1 is off where the profile says so',
      file: cell('-1'),
      profile: { ...ISO, sentinels: [{ value: -1, quality: 'off' }] },
      state: 'readable',
      readings: [
        ['P1', AT, 1.5e-8, 'good'],
        ['P1', LATER, null, 'off'],
      ],
    },
  ],
  '48 states of a gauge in a column of their own': [
    {
      name: 'filament off, broken, degas and starting are told apart',
      file: file(
        'time,channel,value,unit,status',
        `${AT},P1,1e-8,Pa,FILAMENT OFF`,
        '2026-11-08T06:01:00Z,P1,1e-8,Pa,BROKEN FILAMENT',
        '2026-11-08T06:02:00Z,P1,5e-6,Pa,DEGAS',
        '2026-11-08T06:03:00Z,P1,4e-6,Pa,STARTING',
        '2026-11-08T06:04:00Z,P1,1e-8,Pa,OK',
      ),
      profile: ISO,
      state: 'readable',
      readings: [
        ['P1', AT, null, 'off'],
        ['P1', '2026-11-08T06:01:00Z', null, 'fault'],
        ['P1', '2026-11-08T06:02:00Z', 5e-6, 'degas'],
        ['P1', '2026-11-08T06:03:00Z', 4e-6, 'starting'],
        ['P1', '2026-11-08T06:04:00Z', 1e-8, 'good'],
      ],
    },
  ],
  '48 the first minutes of a gauge that was switched on': [
    {
      name: 'count as starting for as long as the profile says, and before it was off nothing is known',
      file: file(
        'time,channel,value,unit,status',
        `${AT},P1,1e-8,Pa,OK`,
        '2026-11-08T06:01:00Z,P1,,Pa,OFF',
        '2026-11-08T06:02:00Z,P1,9e-8,Pa,OK',
        '2026-11-08T06:03:00Z,P1,OVER,Pa,',
        '2026-11-08T06:06:00Z,P1,6e-8,Pa,OK',
        '2026-11-08T06:07:00Z,P1,5e-8,Pa,OK',
      ),
      profile: { ...ISO, startingMinutes: 5 },
      state: 'readable',
      readings: [
        ['P1', AT, 1e-8, 'good'],
        ['P1', '2026-11-08T06:01:00Z', null, 'off'],
        ['P1', '2026-11-08T06:02:00Z', 9e-8, 'starting'],
        ['P1', '2026-11-08T06:03:00Z', null, 'over-range'],
        ['P1', '2026-11-08T06:06:00Z', 6e-8, 'starting'],
        ['P1', '2026-11-08T06:07:00Z', 5e-8, 'good'],
      ],
    },
  ],
  '49 error codes as numbers': [
    { ...reads('1.23E+06', 1.23e6, 'suspect'), remarks: ['outside-ceiling'] },
    {
      name: 'are faults where the profile declares them',
      file: cell('1.23E+04'),
      profile: { ...ISO, sentinels: [{ value: 12300, quality: 'fault' }] },
      state: 'readable',
      readings: [
        ['P1', AT, 1.5e-8, 'good'],
        ['P1', LATER, null, 'fault'],
      ],
    },
  ],
  '50 zero and negative pressures': [
    { ...reads('0', 0, 'suspect'), remarks: ['zero-or-negative'] },
    { ...reads('0.0E+00', 0, 'suspect'), remarks: ['zero-or-negative'] },
    { ...reads('-1', -1, 'suspect'), remarks: ['zero-or-negative'] },
    { ...reads('-2.1E-5', -2.1e-5, 'suspect'), lines: { accepted: 1, flagged: 1 } },
  ],
  '56 a frozen value': [
    {
      name: 'is pointed out after an hour of equal figures at a resolution where noise is expected',
      file: file('time;P1 (Pa)', ...manyRows(80, (i) => (i < 5 ? `3.4${i}E-08` : '3.456E-08'))),
      profile: ISO,
      state: 'readable',
      remarks: ['stuck'],
    },
    {
      name: 'is none where the figures move',
      file: file('time;P1 (Pa)', ...manyRows(80, (i) => `3.4${i % 10}E-08`)),
      profile: ISO,
      state: 'readable',
      more: (out) => expect(out.remarks.map(({ kind }) => kind)).not.toContain('stuck'),
    },
  ],
  '71 words of other languages': [
    {
      name: 'are taken from the profile',
      file: file('Zeit;F1', `${AT};Ein`, `${LATER};Aus`),
      profile: { ...ISO, words: { ein: 'on', aus: 'off' } },
      context: { channels: [{ name: 'F1', quantity: 'switch' }] },
      state: 'readable',
      readings: [
        ['F1', AT, 1, 'good'],
        ['F1', LATER, 0, 'good'],
      ],
    },
    {
      name: 'are asked about where nobody has said what they mean',
      file: file('Zeit;F1', `${AT};1`, `${LATER};Oui`),
      profile: ISO,
      context: { channels: [{ name: 'F1', quantity: 'switch' }] },
      state: 'readable',
      questions: ['unknown-word:oui'],
      more: (out) => expect(out.questions[0]?.choices.map(({ value }) => value)).toContain('on'),
    },
    {
      name: 'are read once they have been answered',
      file: file('Zeit;F1', `${AT};Oui`),
      profile: ISO,
      context: {
        channels: [{ name: 'F1', quantity: 'switch' }],
        answers: [{ id: 'unknown-word:oui', choice: 'on' }],
      },
      state: 'readable',
      readings: [['F1', AT, 1, 'good']],
    },
  ],
}

/** Rows a minute apart with a cell each. */
function manyRows(count: number, text: (i: number) => string): string[] {
  return Array.from({ length: count }, (_, i) => {
    const at = new Date(Date.UTC(2026, 10, 8, 6, i)).toISOString().replace('.000Z', 'Z')
    return `${at};${text(i)}`
  })
}

for (const [title, cases] of Object.entries(CASES))
  describe(title, () => {
    it.each(cases)('$name', check)
  })
