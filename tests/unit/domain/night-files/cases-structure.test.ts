import { describe, expect, it } from 'vitest'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { type Case, check, file } from '#tests/fixtures/night-files/cases.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'

const ISO = SourceProfileSchema.parse({
  unit: 'Pa',
  unitInFile: false,
  time: { format: 'iso', zone: 'UTC' },
  basis: { kind: 'nitrogen-equivalent' },
})
/** The same before anybody has said in which unit its files are written. */
const NO_UNIT = { ...ISO, unit: null }
const A = '2026-11-08T06:00:00Z'
const B = '2026-11-08T06:10:00Z'
const C = '2026-11-08T06:20:00Z'
const pressure = (...names: string[]) => names.map((name) => ({ name, quantity: 'pressure' as const }))
const utf16 = (text: string, bigEnd: boolean, mark: boolean) => {
  const bytes = Buffer.from((mark ? '\ufeff' : '') + text, 'utf16le')
  return bigEnd ? bytes.swap16() : bytes
}

const TWO_ROWS = file('time,P1', `${A},1E-8`, `${B},2E-8`)
const TWO_READINGS: Case['readings'] = [
  ['P1', A, 1e-8, 'good'],
  ['P1', B, 2e-8, 'good'],
]
const plain = (name: string, input: Case['file'], more: Partial<Case> = {}): Case => ({
  name,
  file: input,
  profile: ISO,
  state: 'readable',
  readings: TWO_READINGS,
  ...more,
})

const CASES: Record<string, Case[]> = {
  '14 to 16 encodings': [
    plain('UTF-8 with a byte order mark, which is no part of the first name', `\ufeff${TWO_ROWS}`, {
      more: (out) => expect(out.columns[0]?.inFile).toBe('time'),
    }),
    ...[true, false].flatMap((bigEnd) =>
      [true, false].map((mark) =>
        plain(
          `UTF-16, ${bigEnd ? 'big' : 'little'} end first, ${mark ? 'with' : 'without'} a mark`,
          utf16(TWO_ROWS, bigEnd, mark),
          { lineCount: 3, remarks: ['encoding'] },
        ),
      ),
    ),
    plain('an 8-bit encoding of old', Buffer.from(file('time;P1 (µbar);T1 (°C)', `${A};1;20`), 'latin1'), {
      profile: NO_UNIT,
      remarks: ['encoding'],
      readings: [
        ['P1', A, 0.1, 'good'],
        ['T1', A, 20, 'good'],
      ],
    }),
    plain('labels broken on the way are mended', file('time;P1 (Âµbar);T1 (Â°C)', `${A};1;20`), {
      profile: NO_UNIT,
      readings: [
        ['P1', A, 0.1, 'good'],
        ['T1', A, 20, 'good'],
      ],
    }),
    plain('a unit that lost its first letter stops the file', file('time;P1 (?bar)', `${A};1`), {
      state: 'needs-answers',
      questions: ['unit-word:?bar'],
      readings: [],
    }),
  ],
  '17 line ends': [
    plain('of four kinds in one file', `time,P1\r\n${A},1E-8\r\r\n${B},2E-8\n${C},3E-8\r`, {
      lineCount: 4,
      readings: [...TWO_READINGS, ['P1', C, 3e-8, 'good']],
      more: (out) => expect(out.dialect.lineEnds).toEqual({ crlf: 1, lf: 1, cr: 1, crcrlf: 1 }),
    }),
    plain(
      'inside a quoted comment are part of it',
      `time,P1,comment\n${A},1E-8,"first\r\nsecond"\n${B},2E-8,\n`,
      {
        lines: { header: 1, note: 1, accepted: 2, skipped: 0 },
      },
    ),
  ],
  '18 separators': [
    ...[',', ';', '\t', '|', '  '].map((separator) =>
      plain(`“${separator}”`, TWO_ROWS.replaceAll(',', separator)),
    ),
    plain(
      'a first line that names it is a directive and no data',
      `sep=;\n${TWO_ROWS.replaceAll(',', ';')}`,
      {
        lines: { directive: 1, header: 1, accepted: 2 },
      },
    ),
  ],
  '19 quotes': [
    plain('that are balanced are no matter', file('"time","P1"', `"${A}","1E-8"`, `"${B}","2E-8"`)),
    plain(
      'that stay open cost their own line only',
      file('time,P1,comment', `${A},1E-8,ok`, '2026-11-08T06:05:00Z,9E-8,"open', `${B},2E-8,ok`),
      { rejected: ['3:broken-quote'] },
    ),
    plain(
      'that stay open to the end of the file cost no line before them',
      file('time,P1,comment', `${A},1E-8,ok`, `${B},2E-8,ok`, `${C},9E-8,"open`),
      { rejected: ['4:broken-quote'] },
    ),
    plain(
      'keep a line break in a comment',
      file('time,P1,comment', `${A},1E-8,"two`, 'lines"', `${B},2E-8,`),
      {
        lines: { header: 1, note: 1, accepted: 2, skipped: 0 },
      },
    ),
  ],
  '20 and 21 headers in the middle': [
    plain('the same again is a restart', file('time,P1', `${A},1E-8`, 'time,P1', `${B},2E-8`), {
      lines: { header: 2, accepted: 2 },
      remarks: ['restart'],
    }),
    plain(
      'in another order they are taken by name, a new name is asked about',
      file('time,P1,P2', `${A},1E-8,5E-8`, 'time,P2,P1,P9', `${B},6E-8,2E-8,9E-8`),
      {
        context: { channels: pressure('P1', 'P2') },
        questions: ['unknown-channel:P9'],
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P2', A, 5e-8, 'good'],
          ['P2', B, 6e-8, 'good'],
          ['P1', B, 2e-8, 'good'],
        ],
      },
    ),
  ],
  '22 no header': [
    plain('is read by the order of columns in the profile', file(`${A},1E-8,x`, `${B},2E-8,y`), {
      profile: { ...ISO, columnOrder: ['time', 'P1', '-'] },
    }),
    plain('stops with a preview of each column otherwise', file(`${A},1E-8`, `${B},2E-8`), {
      context: { channels: pressure('P1', 'P2') },
      state: 'needs-answers',
      questions: ['column:2'],
      readings: [],
      more: (out) => {
        expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual(['leave-out', 'P1', 'P2'])
        expect(out.questions[0]?.found).toContain('1E-8')
      },
    }),
    plain('is read once every column has been named', file(`${A},1E-8`, `${B},2E-8`), {
      context: { channels: pressure('P1', 'P2'), answers: [{ id: 'column:2', choice: 'P1' }] },
    }),
  ],
  '23 headers of several rows': [
    plain('names, then units', file('time,P1,P2', ',mbar,Torr', `${A},1E-8,1E-8`), {
      lines: { header: 2, accepted: 1 },
      profile: NO_UNIT,
      readings: [
        ['P1', A, 1e-6, 'good'],
        ['P2', A, (101325 / 760) * 1e-8, 'good'],
      ],
    }),
    plain('places, units and channels', file('time,Gate,Cross', ',mbar,mbar', ',P1,P2', `${A},1E-8,2E-8`), {
      context: { channels: pressure('P1', 'P2') },
      lines: { header: 3, accepted: 1 },
      profile: NO_UNIT,
      readings: [
        ['P1', A, 1e-6, 'good'],
        ['P2', A, 2e-6, 'good'],
      ],
    }),
  ],
  '24 and 25 notes and footers': [
    plain(
      'are kept as notes, and totals never become readings',
      file(
        'Night log of the west end',
        '# serial 4711',
        '// firmware 2.1',
        '% unit: Pa',
        '',
        'time,P1',
        `${A},1E-8`,
        '# operator was here',
        `${B},2E-8`,
        'Max,9E-8',
        'End of log',
      ),
      { lines: { note: 6, header: 1, accepted: 2, skipped: 2, skippedBy: { footer: 2 } } },
    ),
  ],
  '26 a last line that was cut': [
    plain('in a number', `${TWO_ROWS}${C},3.2E-`, { rejected: ['4:partial-last-line'] }),
    plain('before its last field', `time,P1,P2\n${A},1E-8,5E-8\n${B},2E-8`, {
      rejected: ['3:partial-last-line'],
      readings: [
        ['P1', A, 1e-8, 'good'],
        ['P2', A, 5e-8, 'good'],
      ],
    }),
    plain('is whole where only the line end is missing', TWO_ROWS.trimEnd()),
  ],
  '27 and 28 damage': [
    plain('a block of NUL bytes costs its line', `${TWO_ROWS}# ${'-'.repeat(300)}\n${'\0'.repeat(40)}\n`, {
      rejected: ['5:damaged'],
      remarks: ['damaged-bytes'],
      more: (out) => {
        const from = TWO_ROWS.length + 303
        expect(out.remarks[0]?.text).toContain(`Bytes ${from} to ${from + 39} are NUL`)
      },
    }),
    plain('fewer bytes than announced are pointed out', TWO_ROWS, {
      context: { statedBytes: 1000 },
      remarks: ['short-file'],
    }),
  ],
  '51 to 55 repeats, conflicts, disorder, gaps, changes of period': [
    plain(
      'an exact repeat is kept once and counted',
      file('time,P1', `${A},1E-8`, `${A},1E-8`, `${B},2E-8`),
      {
        lines: { accepted: 2, skipped: 1, skippedBy: { duplicate: 1 } },
      },
    ),
    plain('two values of one instant are both kept and marked', file('time,P1', `${A},1E-8`, `${A},2E-8`), {
      remarks: ['conflicts'],
      readings: [
        ['P1', A, 1e-8, 'good', 'conflict'],
        ['P1', A, 2e-8, 'good', 'conflict'],
      ],
    }),
    plain(
      'a row out of order is read where it belongs',
      file('time,P1', `${B},2E-8`, `${A},1E-8`, `${C},3E-8`),
      {
        remarks: ['disorder'],
        readings: [
          ['P1', B, 2e-8, 'good'],
          ['P1', A, 1e-8, 'good'],
          ['P1', C, 3e-8, 'good'],
        ],
      },
    ),
    plain(
      'many steps back look like files laid one behind the other, and that is asked',
      file(
        'time,P1',
        ...Array.from({ length: 6 }, (_, i) => [`${B},2E-8`, `2026-11-08T06:0${i}:00Z,1E-8`]).flat(),
      ),
      {
        readings: undefined,
        remarks: ['disorder'],
        more: (out) =>
          expect(out.remarks.find(({ kind }) => kind === 'disorder')?.text).toContain('several files'),
      },
    ),
    plain(
      'more than three periods without a row are a gap',
      file('time,P1', `${A},1E-8`, '2026-11-08T07:00:00Z,2E-8'),
      {
        profile: { ...ISO, expectedPeriodSeconds: 600 },
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P1', '2026-11-08T07:00:00Z', 2e-8, 'good'],
        ],
        more: (out) => expect(out.gaps).toHaveLength(1),
      },
    ),
    plain(
      'three periods are none, and a change of period is no matter',
      file('time,P1', `${A},1E-8`, '2026-11-08T06:30:00Z,1.1E-8', '2026-11-08T06:30:01Z,1.2E-8'),
      {
        profile: { ...ISO, expectedPeriodSeconds: 600 },
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P1', '2026-11-08T06:30:00Z', 1.1e-8, 'good'],
          ['P1', '2026-11-08T06:30:01Z', 1.2e-8, 'good'],
        ],
        more: (out) => expect(out.gaps).toHaveLength(0),
      },
    ),
  ],
  '57, 58, 60 and 61 names of channels': [
    plain(
      'that the register lacks are asked about, and their column is left out',
      file('time,P1,P2,P3', `${A},1E-8,,7E-8`),
      {
        context: { channels: pressure('P1', 'P2') },
        questions: ['unknown-channel:P3'],
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P2', A, null, 'no-signal'],
        ],
      },
    ),
    plain('that are ignored by now are not asked about', file('time,P1,P3', `${A},1E-8,7E-8`), {
      context: { channels: [...pressure('P1'), { name: 'P3', quantity: 'pressure', ignored: true }] },
      readings: [['P1', A, 1e-8, 'good']],
    }),
    plain('may differ in case, blanks and dashes', file('time,channel,value,unit', `${A},hc 03 b,1E-8,Pa`), {
      context: { channels: pressure('HC-03B') },
      readings: [['HC-03B', A, 1e-8, 'good']],
    }),
    plain(
      'that fit two channels are asked about',
      file('time,channel,value,unit', `${A},hc 03 b,1E-8,Pa`, `${A},P1,1E-8,Pa`),
      {
        context: { channels: pressure('HC-03B', 'HC-03-B', 'P1') },
        questions: ['unknown-channel:hc 03 b'],
        readings: [['P1', A, 1e-8, 'good']],
      },
    ),
    plain('that come twice stop both their columns', file('time,P1,P2,P1', `${A},1E-8,5E-8,3E-8`), {
      questions: ['same-name:P1'],
      readings: [['P2', A, 5e-8, 'good']],
      more: (out) =>
        expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual(['2', '4', 'leave-out']),
    }),
    plain(
      'that come twice are read from the column that somebody chose',
      file('time,P1,P2,P1', `${A},1E-8,5E-8,3E-8`),
      {
        context: { answers: [{ id: 'same-name:P1', choice: '4' }] },
        readings: [
          ['P2', A, 5e-8, 'good'],
          ['P1', A, 3e-8, 'good'],
        ],
      },
    ),
    plain('outside the dates of their channel are flagged and not good', TWO_ROWS, {
      context: { channels: [{ name: 'P1', quantity: 'pressure', untilMs: Date.UTC(2026, 10, 8, 6, 5) }] },
      lines: { accepted: 1, flagged: 1 },
      remarks: ['outside-dates'],
      readings: [
        ['P1', A, 1e-8, 'good'],
        ['P1', B, 2e-8, 'suspect'],
      ],
    }),
  ],
  '63 and 67 what is no log': [
    ...(
      [
        ['spreadsheet-file', Buffer.from('PK\x03\x04......[Content_Types].xml', 'latin1')],
        ['archive', Buffer.from('PK\x03\x04......NL-W.csv', 'latin1')],
        ['archive', Buffer.from([0x1f, 0x8b, 8, 0])],
        ['empty-file', ''],
        ['header-only', 'time,P1\n'],
        ['not-a-log', '<!doctype html><title>Sign in</title>\n'],
      ] as const
    ).map(
      ([code, bytes]): Case => ({
        name: `is refused as ${code}`,
        file: bytes,
        context: { fileName: 'NL-W_2026-11-08.csv' },
        state: 'refused',
        refusal: { code },
        readings: [],
      }),
    ),
  ],
  '64 and 65 text that looks like a formula or markup': [
    plain(
      'stays text: numbers may be negative, comments are no readings',
      file('time,P1,comment', `${A},1E-8,=SUM(A1)`, `${B},2E-8,<script>alert(1)</script>`),
    ),
    plain(
      'below a channel is turned away and never reckoned',
      file('time,P1', `${A},1E-8`, `${B},2E-8`, `${C},=1+1`),
      {
        questions: ['unknown-word:=1+1'],
        rejected: ['4:unknown-word'],
      },
    ),
  ],
  '72 fields that shifted': [
    plain(
      'cost their line',
      file('time,comment,P1,P2', `${A},ok,1E-8,5E-8`, `${B},vented, then closed,2E-8,6E-8`),
      {
        rejected: ['3:field-count'],
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P2', A, 5e-8, 'good'],
        ],
      },
    ),
  ],
  'the sample of the west logger': [
    {
      name: 'has four rows, two headers, a note, a directive and a cut line',
      file: [
        'sep=;',
        '# Quelle: Nachtlogger West   Einheit: mbar',
        'Zeit;HC-03A;HC-03B;TC-03',
        '25.10.2026 02:59:30;6,1E-10;4,9E-10;OFF',
        '25.10.2026 02:00:30;6,1E-10;4,8E-10;OFF',
        '25.10.2026 02:01:30;6,0E-10;***;OFF',
        'Zeit;HC-03B;HC-03A;TC-03',
        '25.10.2026 02:02:30;4,8E-10;6,0E-10;OFF',
        '25.10.2026 02:03:3',
      ].join('\n'),
      profile: { ...NL_W, expectedPeriodSeconds: 60 },
      state: 'readable',
      lines: { accepted: 4, skipped: 1, header: 2, note: 1, directive: 1, total: 9 },
      readings: [
        ['HC-03A', '2026-10-25T00:59:30Z', 6.1e-8, 'good'],
        ['HC-03B', '2026-10-25T00:59:30Z', 4.9e-8, 'good'],
        ['TC-03', '2026-10-25T00:59:30Z', null, 'off'],
        ['HC-03A', '2026-10-25T01:00:30Z', 6.1e-8, 'good'],
        ['HC-03B', '2026-10-25T01:00:30Z', 4.8e-8, 'good'],
        ['TC-03', '2026-10-25T01:00:30Z', null, 'off'],
        ['HC-03A', '2026-10-25T01:01:30Z', 6e-8, 'good'],
        ['HC-03B', '2026-10-25T01:01:30Z', null, 'no-signal'],
        ['TC-03', '2026-10-25T01:01:30Z', null, 'off'],
        ['HC-03B', '2026-10-25T01:02:30Z', 4.8e-8, 'good'],
        ['HC-03A', '2026-10-25T01:02:30Z', 6e-8, 'good'],
        ['TC-03', '2026-10-25T01:02:30Z', null, 'off'],
      ],
    },
  ],
}

for (const [title, cases] of Object.entries(CASES))
  describe(title, () => {
    it.each(cases)('$name', check)
  })
