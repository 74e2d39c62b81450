import { describe, expect, it } from 'vitest'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { type Case, check, type Expected, file } from '#tests/fixtures/night-files/cases.ts'

const PLAIN = SourceProfileSchema.parse({ unit: 'Pa', basis: { kind: 'nitrogen-equivalent' } })
const VIENNA = { ...PLAIN, time: { ...PLAIN.time, format: 'dmy' as const, zone: 'Europe/Vienna' } }
const ISO_VIENNA = { ...VIENNA, time: { ...VIENNA.time, format: 'iso' as const } }
const HEADER = 'time;P1 (Pa)'

/** A file with one pressure a row, 1E-8 and up, at these times. */
function at(...times: string[]): string {
  return file(HEADER, ...times.map((time, i) => `${time};${i + 1}.5E-8`))
}

/** The readings of such a file. */
function good(...instants: string[]): Expected[] {
  return instants.map((instant, i) => ['P1', instant, (i + 1.5) * 1e-8, 'good'])
}

const CASES: Record<string, Case[]> = {
  '29 local time without an offset': [
    {
      name: 'is read in the zone of the profile',
      file: at('08.11.2026 06:00:00'),
      profile: VIENNA,
      state: 'readable',
      readings: good('2026-11-08T05:00:00Z'),
    },
    {
      name: 'is asked about once where the profile names none, with both readings',
      file: at('08.11.2026 16:00:00', '13.11.2026 06:00'),
      profile: { ...VIENNA, time: { ...VIENNA.time, zone: null } },
      state: 'needs-answers',
      questions: ['zone'],
      readings: [],
      more: (out) =>
        expect(
          out.questions[0]?.choices.map(({ value, candidates }) => [value, candidates[0]?.meaning]),
        ).toEqual([
          ['Europe/Vienna', '2026-11-08 15:00:00 UTC'],
          ['UTC', '2026-11-08 16:00:00 UTC'],
        ]),
    },
  ],
  '30 the hour that the autumn clock change repeats': [
    {
      name: 'is told apart by the order of rows',
      file: at(
        '25.10.2026 01:40:00',
        '25.10.2026 02:00:00',
        '25.10.2026 02:20:00',
        '25.10.2026 02:40:00',
        '25.10.2026 02:00:00',
        '25.10.2026 02:20:00',
        '25.10.2026 02:40:00',
        '25.10.2026 03:00:00',
      ),
      profile: VIENNA,
      state: 'readable',
      readings: good(
        '2026-10-24T23:40:00Z',
        '2026-10-25T00:00:00Z',
        '2026-10-25T00:20:00Z',
        '2026-10-25T00:40:00Z',
        '2026-10-25T01:00:00Z',
        '2026-10-25T01:20:00Z',
        '2026-10-25T01:40:00Z',
        '2026-10-25T02:00:00Z',
      ),
      remarks: ['repeated-hour'],
    },
    {
      name: 'is marked as ambiguous where somebody sorted the rows, and no row counts as a duplicate',
      file: file(
        HEADER,
        '25.10.2026 02:00:00;1E-8',
        '25.10.2026 02:00:00;1E-8',
        '25.10.2026 02:20:00;1E-8',
        '25.10.2026 02:20:00;2E-8',
      ),
      profile: VIENNA,
      state: 'readable',
      lines: { accepted: 0, flagged: 4, skipped: 0 },
      remarks: ['ambiguous-hour'],
      more: (_, readings) => {
        expect(readings).toHaveLength(4)
        expect(readings.every(({ marks }) => marks.includes('time-ambiguous'))).toBe(true)
      },
    },
  ],
  '31 the hour that the spring clock change leaves out': [
    {
      name: 'is not moved silently: a clock without clock changes is offered',
      file: at('29.03.2026 01:50:00', '29.03.2026 02:10:00', '29.03.2026 03:10:00'),
      profile: VIENNA,
      state: 'readable',
      questions: ['clock-changes'],
      rejected: ['3:nonexistent-time'],
      more: (out) =>
        expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual(['+01:00', 'leave-out']),
    },
    {
      name: 'exists on a clock that stays on winter time, which then holds for the whole file',
      file: at('29.03.2026 01:50:00', '29.03.2026 02:10:00', '29.03.2026 03:10:00'),
      profile: VIENNA,
      context: { answers: [{ id: 'clock-changes', choice: '+01:00' }] },
      state: 'readable',
      readings: good('2026-03-29T00:50:00Z', '2026-03-29T01:10:00Z', '2026-03-29T02:10:00Z'),
    },
  ],
  '32 winter time all year': [
    {
      name: 'is read by a fixed offset in the profile',
      file: at('08.07.2026 06:00:00'),
      profile: { ...VIENNA, time: { ...VIENNA.time, zone: '+01:00' } },
      state: 'readable',
      readings: good('2026-07-08T05:00:00Z'),
    },
  ],
  '33 offsets in the text': [
    {
      name: 'count, whatever the zone of the site',
      file: at('2026-11-08T06:00:00Z', '2026-11-08T06:10:00+00:00', '2026-11-08T06:20:00Z'),
      profile: ISO_VIENNA,
      state: 'readable',
      readings: good('2026-11-08T06:00:00Z', '2026-11-08T06:10:00Z', '2026-11-08T06:20:00Z'),
    },
    {
      name: 'are pointed out where they change inside the file',
      file: at('2026-11-08T06:00:00+01:00', '2026-11-08T00:10:00-05:00'),
      profile: ISO_VIENNA,
      state: 'readable',
      lines: { accepted: 1, flagged: 1 },
      readings: good('2026-11-08T05:00:00Z', '2026-11-08T05:10:00Z'),
      remarks: ['offset-change'],
    },
    {
      name: 'may change with the clocks of the site',
      file: at('2026-10-25T02:50:00+02:00', '2026-10-25T02:00:00+01:00'),
      profile: ISO_VIENNA,
      state: 'readable',
      lines: { accepted: 2, flagged: 0 },
      readings: good('2026-10-25T00:50:00Z', '2026-10-25T01:00:00Z'),
    },
  ],
  '34 a clock that fell back to its first day': [
    {
      name: 'leaves its rows out and asks when the first was written',
      file: at('08.11.2026 06:00', '01.01.2000 00:00', '01.01.2000 00:10', '08.11.2026 06:30'),
      profile: { ...VIENNA, expectedPeriodSeconds: 600 },
      state: 'readable',
      questions: ['clock-reset:3'],
      rejected: ['3:clock-reset', '4:clock-reset'],
      more: (out) =>
        expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual([
          '2026-11-08T05:10:00.000Z',
          'leave-out',
        ]),
    },
    {
      name: 'keeps the spacing of its rows once that is said, and marks them',
      file: at('08.11.2026 06:00', '01.01.2000 00:00', '01.01.2000 00:10', '08.11.2026 06:30'),
      profile: VIENNA,
      context: { answers: [{ id: 'clock-reset:3', choice: '2026-11-08 06:12' }] },
      state: 'readable',
      readings: [
        ['P1', '2026-11-08T05:00:00Z', 1.5e-8, 'good'],
        ['P1', '2026-11-08T05:12:00Z', 2.5e-8, 'good', 'time-reconstructed'],
        ['P1', '2026-11-08T05:22:00Z', 3.5e-8, 'good', 'time-reconstructed'],
        ['P1', '2026-11-08T05:30:00Z', 4.5e-8, 'good'],
      ],
    },
    ...['01.01.1970 01:00', '01.01.2010 00:00'].map(
      (start): Case => ({
        name: `${start} stops a file that holds nothing else`,
        file: at(start),
        profile: VIENNA,
        state: 'needs-answers',
        questions: ['clock-reset:2'],
        readings: [],
      }),
    ),
  ],
  '35 clock jumps': [
    {
      name: 'a step back of up to five seconds keeps the order and is flagged',
      file: at('08.11.2026 06:00:00', '08.11.2026 06:00:10', '08.11.2026 06:00:07', '08.11.2026 06:00:20'),
      profile: VIENNA,
      state: 'readable',
      lines: { accepted: 3, flagged: 1 },
      readings: [
        ['P1', '2026-11-08T05:00:00Z', 1.5e-8, 'good'],
        ['P1', '2026-11-08T05:00:10Z', 2.5e-8, 'good'],
        ['P1', '2026-11-08T05:00:07Z', 3.5e-8, 'good', 'order-kept'],
        ['P1', '2026-11-08T05:00:20Z', 4.5e-8, 'good'],
      ],
    },
    {
      name: 'a larger one with rows that run on from there is asked about',
      file: at(...minutes(20), ...minutes(20, 6, 5).slice(0, 12)),
      profile: VIENNA,
      state: 'needs-answers',
      questions: ['clock-jump:22'],
      remarks: ['disorder'],
    },
    {
      name: 'is taken as written once somebody says so',
      file: at(...minutes(20), ...minutes(20, 6, 5).slice(0, 12)),
      profile: VIENNA,
      context: { answers: [{ id: 'clock-jump:22', choice: 'as-written' }] },
      state: 'readable',
      more: (_, readings) => expect(readings).toHaveLength(32),
    },
    {
      name: 'marks the rows before it where the clock was set right by it',
      file: at(...minutes(20), ...minutes(20, 6, 5).slice(0, 12)),
      profile: VIENNA,
      context: { answers: [{ id: 'clock-jump:22', choice: 'doubt-before' }] },
      state: 'readable',
      more: (_, readings) => {
        const doubtful = readings.filter(({ marks }) => marks.includes('time-ambiguous'))
        expect(doubtful.map(({ line }) => line)).toEqual(Array.from({ length: 20 }, (_, i) => i + 2))
      },
    },
  ],
  '37 epochs': [
    ...(
      [
        ['1794204000', 'seconds'],
        ['1794204000000', 'milliseconds'],
        ['1794204000000000', 'microseconds'],
      ] as const
    ).map(
      ([text, unit]): Case => ({
        name: `of ${unit} are UTC, whatever the zone of the profile`,
        file: at(text),
        profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'Europe/Vienna' } },
        state: 'readable',
        readings: good('2026-11-09T06:00:00Z'),
      }),
    ),
    {
      name: 'with digits too many cost their line',
      file: at('1794204000000', '17942040000000000', '1794204060000'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'epoch-ms' } },
      state: 'readable',
      rejected: ['3:unreadable-time'],
    },
    {
      name: 'rounded by a spreadsheet are refused: the seconds are gone',
      file: at('1.7941E+09', '1.7941E+09'),
      profile: PLAIN,
      state: 'refused',
      refusal: { code: 'no-rows', line: 2, column: 1 },
    },
  ],
  '38 serial day numbers': [
    {
      name: 'are asked about: two bases are in use',
      file: at('46335.3125', '46335.3194444444'),
      profile: PLAIN,
      state: 'needs-answers',
      questions: ['date-order'],
      more: (out) =>
        expect(
          out.questions[0]?.choices.map(({ value, candidates }) => [value, candidates[0]?.meaning]),
        ).toEqual([
          ['serial-1900', '2026-11-09 07:30:00'],
          ['serial-1904', '2030-11-10 07:30:00'],
        ]),
    },
    {
      name: 'are asked about with a decimal comma as well',
      file: file('Zeit;P1 (Pa)', '46335,3125;1,5E-8', '46335,3194444444;2,5E-8'),
      profile: PLAIN,
      state: 'needs-answers',
      questions: ['date-order'],
    },
    {
      name: 'are local time once the base is known',
      file: at('46335.3125'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'serial-1900', zone: 'Europe/Vienna' } },
      state: 'readable',
      // 46 335 days after 1899-12-30 is 2026-11-09, and 0.3125 of a day is 07:30.
      readings: good('2026-11-09T06:30:00Z'),
    },
    {
      name: 'are read with the decimal comma that the values have too',
      file: file('Zeit;P1 (Pa)', '46335,3125;1,5E-8', '46335,3194444444;2,5E-8'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'serial-1900', zone: 'Europe/Vienna' } },
      state: 'readable',
      readings: [
        ['P1', '2026-11-09T06:30:00Z', 1.5e-8, 'good'],
        ['P1', '2026-11-09T06:40:00Z', 2.5e-8, 'good'],
      ],
    },
    {
      name: 'are read with a decimal comma that stands in the times alone',
      file: file('Zeit;P1 (Pa)', '46334,3125;1E-8', '46334,3194444444;2E-8', '46334,3263888889;3E-8'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'serial-1900', zone: 'America/St_Johns' } },
      state: 'readable',
      // Three and a half hours behind UTC.
      readings: [
        ['P1', '2026-11-08T11:00:00Z', 1e-8, 'good'],
        ['P1', '2026-11-08T11:10:00Z', 2e-8, 'good'],
        ['P1', '2026-11-08T11:20:00Z', 3e-8, 'good'],
      ],
    },
    {
      name: 'are asked about with a comma in the times and points in the values',
      file: file('Zeit;P1 (Pa)', '46335,3125;1.5E-8', '46335,3194444444;2.5E-8', '46335,3263888889;3.5E-8'),
      profile: PLAIN,
      state: 'needs-answers',
      questions: ['date-order'],
    },
    {
      name: 'are read with a comma in the times and points in the values once the base is known',
      file: file('Zeit;P1 (Pa)', '46335,3125;1.5E-8', '46335,3194444444;2.5E-8', '46335,3263888889;3.5E-8'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'serial-1900', zone: 'Europe/Vienna' } },
      state: 'readable',
      readings: [
        ['P1', '2026-11-09T06:30:00Z', 1.5e-8, 'good'],
        ['P1', '2026-11-09T06:40:00Z', 2.5e-8, 'good'],
        ['P1', '2026-11-09T06:50:00Z', 3.5e-8, 'good'],
      ],
    },
  ],
  '39 elapsed seconds': [
    {
      name: 'are added to the start in a comment',
      file: file('# Start: 2026-11-08 06:00:00', 'elapsed_s;P1 (Pa)', '60;1.5E-8', '90.5;2.5E-8'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'Europe/Vienna' } },
      state: 'readable',
      readings: [
        ['P1', '2026-11-08T05:01:00Z', 1.5e-8, 'good'],
        ['P1', '2026-11-08T05:01:30.500Z', 2.5e-8, 'good'],
      ],
    },
    {
      name: 'run from a new start after a restart of the logger',
      file: file(
        '# Start: 2026-11-08 06:00:00',
        'elapsed_s;P1 (Pa)',
        '60;1.5E-8',
        '# Start: 2026-11-08 07:00:00',
        'elapsed_s;P1 (Pa)',
        '60;2.5E-8',
      ),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'Europe/Vienna' } },
      state: 'readable',
      readings: good('2026-11-08T05:01:00Z', '2026-11-08T06:01:00Z'),
      remarks: ['restart'],
    },
    {
      name: 'stop the file where no start stands anywhere',
      file: file('elapsed_s;P1 (Pa)', '60;1.5E-8'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'Europe/Vienna' } },
      state: 'needs-answers',
      questions: ['start'],
      readings: [],
    },
  ],
  '40 day and month that cannot be told apart': [
    {
      name: 'stop the file, whatever the locale of the server',
      file: at('03/04/2026 06:00', '03/04/2026 06:10'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'UTC' } },
      state: 'needs-answers',
      questions: ['date-order'],
      readings: [],
      more: (out) => expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual(['dmy', 'mdy']),
    },
    {
      name: 'are plain where a part is above twelve anywhere',
      file: at('03/04/2026 23:50', '13/04/2026 00:00'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'UTC' } },
      state: 'readable',
      readings: good('2026-04-03T23:50:00Z', '2026-04-13T00:00:00Z'),
    },
  ],
  '41 rarer ways to write a time': [
    {
      name: 'two digits of a year and 24:00',
      file: at('07.11.26 23:50', '07.11.26 24:00'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'dmy', zone: 'UTC' } },
      state: 'readable',
      readings: good('2026-11-07T23:50:00Z', '2026-11-08T00:00:00Z'),
    },
    {
      name: 'names of months in other languages',
      file: at('7. Dez 2026 06:00', '8 déc. 2025 06:00'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'month-name', zone: 'UTC' } },
      context: { nowMs: Date.UTC(2026, 11, 9) },
      state: 'readable',
      readings: good('2026-12-07T06:00:00Z', '2025-12-08T06:00:00Z'),
    },
    {
      name: 'a sixtieth second is the next minute, and flagged',
      file: at('2025-12-31T23:59:60Z'),
      profile: ISO_VIENNA,
      state: 'readable',
      lines: { flagged: 1 },
      readings: good('2026-01-01T00:00:00Z'),
    },
  ],
  '42 halves of the day': [
    {
      name: '12:05 AM is five past midnight, 12:05 PM five past noon',
      file: at('11/08/2026 12:05 AM', '11/08/2026 11:59 AM', '11/08/2026 12:05 PM', '11/13/2026 1:00 pm'),
      profile: { ...PLAIN, time: { ...PLAIN.time, format: 'mdy', zone: 'UTC' } },
      context: { nowMs: Date.UTC(2026, 10, 14) },
      state: 'readable',
      readings: good(
        '2026-11-08T00:05:00Z',
        '2026-11-08T11:59:00Z',
        '2026-11-08T12:05:00Z',
        '2026-11-13T13:00:00Z',
      ),
    },
    {
      name: 'stop the file where nothing tells them apart and times go back at noon',
      file: at(
        ...['10:00', '11:00', '12:00', '01:00', '02:00', '03:00', '04:00'].map(
          (hour) => `08.11.2026 ${hour}`,
        ),
      ),
      profile: VIENNA,
      state: 'needs-answers',
      questions: ['half-day:5'],
    },
  ],
  '43 dates that are written once': [
    {
      name: 'in a column of their own are carried down until the next',
      file: file(
        'date;time;P1 (Pa)',
        '07.11.2026;23:50;1.5E-8',
        ';23:55;2.5E-8',
        '13.11.2026;00:00;3.5E-8',
        ';00:05;4.5E-8',
      ),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'UTC' } },
      context: { nowMs: Date.UTC(2026, 10, 14) },
      state: 'readable',
      readings: good(
        '2026-11-07T23:50:00Z',
        '2026-11-07T23:55:00Z',
        '2026-11-13T00:00:00Z',
        '2026-11-13T00:05:00Z',
      ),
    },
    {
      name: 'in the cell of the time are carried down as well',
      file: at('2026-11-08 06:00', '06:10', '06:20'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'UTC' } },
      state: 'readable',
      readings: good('2026-11-08T06:00:00Z', '2026-11-08T06:10:00Z', '2026-11-08T06:20:00Z'),
    },
    {
      name: 'on a line of their own are carried down as well',
      file: file('# Date: 2026-11-08', HEADER, '06:00;1.5E-8', '06:10;2.5E-8'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'UTC' } },
      state: 'readable',
      readings: good('2026-11-08T06:00:00Z', '2026-11-08T06:10:00Z'),
    },
    {
      name: 'have to advance at midnight: rows behind it without a new date are turned away',
      file: at('2026-11-08 23:50', '23:55', '00:00', '00:05'),
      profile: { ...PLAIN, time: { ...PLAIN.time, zone: 'UTC' } },
      state: 'readable',
      readings: good('2026-11-08T23:50:00Z', '2026-11-08T23:55:00Z'),
      rejected: ['4:unreadable-time', '5:unreadable-time'],
    },
  ],
  '44 fractions of seconds, and seconds that are missing': [
    {
      name: 'keep their digits down to the millisecond',
      file: at('2026-11-08T06:00:00.5Z', '2026-11-08T06:00:01.25Z', '2026-11-08T06:00:02.125Z'),
      profile: ISO_VIENNA,
      state: 'readable',
      readings: good('2026-11-08T06:00:00.500Z', '2026-11-08T06:00:01.250Z', '2026-11-08T06:00:02.125Z'),
    },
    {
      name: 'many rows of one minute keep their order, are marked as coarse, and are not spread',
      file: at(...Array.from({ length: 8 }, (_, i) => `08.11.2026 07:0${Math.floor(i / 4)}`)),
      profile: VIENNA,
      state: 'readable',
      lines: { accepted: 0, flagged: 8 },
      remarks: ['coarse-time'],
      more: (_, readings) => {
        expect(readings.map(({ at: when, seq }) => `${when.slice(11, 16)} ${seq}`)).toEqual([
          '06:00 0',
          '06:00 1',
          '06:00 2',
          '06:00 3',
          '06:01 0',
          '06:01 1',
          '06:01 2',
          '06:01 3',
        ])
        for (const { marks } of readings) expect(marks).toEqual(['time-coarse', 'order-kept'])
      },
    },
  ],
}

/** Times a minute apart from an hour and minute of 8 November on. */
function minutes(count: number, hour = 6, minute = 0): string[] {
  return Array.from({ length: count }, (_, i) => {
    const total = hour * 60 + minute + i
    const two = (value: number) => String(value).padStart(2, '0')
    return `08.11.2026 ${two(Math.floor(total / 60))}:${two(total % 60)}:00`
  })
}

for (const [title, cases] of Object.entries(CASES))
  describe(title, () => {
    it.each(cases)('$name', check)
  })
