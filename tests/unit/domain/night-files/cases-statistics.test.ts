import { describe, expect, it } from 'vitest'
import { profileWithAnswers } from '#app/domain/night-files/profile-answers.ts'
import { SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { type Case, check, file } from '#tests/fixtures/night-files/cases.ts'
import { readFlat } from '#tests/fixtures/night-files/read.ts'

const OPEN = SourceProfileSchema.parse({
  unit: 'Pa',
  unitInFile: false,
  time: { format: 'iso', zone: 'UTC' },
  basis: { kind: 'nitrogen-equivalent' },
})
const MEANS = { ...OPEN, averaging: 'mean' as const }
const A = '2026-11-08T06:00:00Z'
const B = '2026-11-08T06:10:00Z'
const channels = ['P1', 'P2'].map((name) => ({ name, quantity: 'pressure' as const }))
const one = (name: string, input: string, more: Partial<Case>): Case => ({
  name,
  file: input,
  profile: OPEN,
  state: 'readable',
  ...more,
  context: { channels, ...more.context },
})

const BESIDE = file('time,P1,P1 min,P1 max', `${A},1.0E-8,0.9E-8,1.1E-8`, `${B},2E-8,1E-8,3E-8`)
const ONLY = file('time,P1_min,P1_mean,P1_max', `${A},0.9E-8,1.0E-8,1.1E-8`, `${B},1E-8,2E-8,3E-8`)
const READ: Case['readings'] = [
  ['P1', A, 1e-8, 'good'],
  ['P1', B, 2e-8, 'good'],
]
const answers = (...pairs: [string, string][]) => ({ answers: pairs.map(([id, choice]) => ({ id, choice })) })

const CASES: Record<string, Case[]> = {
  '70 lowest and highest values beside a reading': [
    one('are no readings; what the reading stands for is asked once, and not read into it', BESIDE, {
      questions: ['averaging'],
      readings: READ,
      lines: { accepted: 2, flagged: 0 },
      remarks: ['averaged'],
      more: (out) => {
        expect(out.averaging).toBeNull()
        expect(out.columns.map(({ statistic }) => statistic?.kind ?? null)).toEqual([
          null,
          null,
          'lowest',
          'highest',
        ])
        expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual(['momentary', 'mean', 'log-mean'])
      },
    }),
    one('are taken quietly where the profile says what a row stands for', BESIDE, {
      profile: MEANS,
      readings: READ,
      more: (out) => expect(out.averaging).toBe('mean'),
    }),
    one(
      'flag a row whose reading lies outside them, and change nothing in it',
      BESIDE.replace('2E-8,', '4E-8,'),
      {
        profile: MEANS,
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P1', B, 4e-8, 'good'],
        ],
        lines: { accepted: 1, flagged: 1 },
        remarks: ['outside-bounds'],
      },
    ),
    one(
      'are compared in their own unit, wherever the header has it',
      file(
        'time,P1 (Pa),P1 min (mbar),P1 (mbar) max',
        `${A},1E-8,0.9E-10,1.1E-10`,
        `${B},1E-8,1.2E-10,1.3E-10`,
      ),
      {
        profile: { ...MEANS, unit: null },
        readings: [
          ['P1', A, 1e-8, 'good'],
          ['P1', B, 1e-8, 'good'],
        ],
        lines: { accepted: 1, flagged: 1 },
        remarks: ['outside-bounds'],
      },
    ),
    one('that are words or blank say nothing about the reading', BESIDE.replace('1E-8,3E-8', 'OFF,'), {
      profile: MEANS,
      readings: READ,
      lines: { accepted: 2, flagged: 0 },
    }),
    one('are channels of their own where the register has them', BESIDE, {
      context: { channels: [...channels, { name: 'P1 min', quantity: 'pressure' }] },
      profile: MEANS,
      readings: [
        ['P1', A, 1e-8, 'good'],
        ['P1 min', A, 9e-9, 'good'],
        ['P1', B, 2e-8, 'good'],
        ['P1 min', B, 1e-8, 'good'],
      ],
    }),
  ],
  '70 a channel that has a lowest, a highest and a mean value and no other': [
    one('stops the file until somebody says which of them counts', ONLY, {
      state: 'needs-answers',
      questions: ['reading-of'],
      readings: [],
      more: (out) =>
        expect(
          out.questions[0]?.choices.map(({ value, candidates }) => [value, candidates[0]?.text]),
        ).toEqual([
          ['lowest', '0.9E-8'],
          ['mean', '1.0E-8'],
          ['highest', '1.1E-8'],
          ['leave-out', undefined],
        ]),
    }),
    one('is read by the mean once that is said, and labelled', ONLY, {
      context: answers(['reading-of', 'mean'], ['averaging', 'log-mean']),
      readings: READ,
      more: (out) => {
        expect(out.averaging).toBe('log-mean')
        expect(out.columns[2]).toMatchObject({ channel: 'P1', statistic: { of: 'P1', kind: 'mean' } })
      },
    }),
    one('is asked what sort of mean it is only when the mean is the reading', ONLY, {
      context: answers(['reading-of', 'mean']),
      questions: ['averaging'],
      readings: READ,
      more: (out) =>
        expect(out.questions[0]?.choices.map(({ value }) => value)).toEqual(['mean', 'log-mean']),
    }),
    one('is read by the highest where somebody wants that', ONLY, {
      context: answers(['reading-of', 'highest']),
      readings: [
        ['P1', A, 1.1e-8, 'good'],
        ['P1', B, 3e-8, 'good'],
      ],
      more: (out) => expect(out.averaging).toBeNull(),
    }),
    one(
      'keeps the other channels of the file readable meanwhile',
      ONLY.replace('time,', 'time,P2,').replaceAll('Z,', 'Z,5E-8,'),
      {
        questions: ['reading-of'],
        readings: [
          ['P2', A, 5e-8, 'good'],
          ['P2', B, 5e-8, 'good'],
        ],
      },
    ),
    one('is asked about again where the profile means a column that is missing', ONLY, {
      profile: { ...MEANS, readingColumn: 'log-mean' },
      state: 'needs-answers',
      questions: ['reading-of'],
      readings: [],
    }),
    one('is asked about where its column is called a mean and the profile says momentary', ONLY, {
      profile: { ...OPEN, averaging: 'momentary', readingColumn: 'mean' },
      questions: ['averaging'],
      readings: READ,
      more: (out) => expect(out.averaging).toBe('mean'),
    }),
    one(
      'needs no question about the sort of mean where the header has it',
      ONLY.replace('P1_mean', 'log mean P1'),
      {
        profile: { ...OPEN, readingColumn: 'log-mean' },
        readings: READ,
        more: (out) => expect(out.averaging).toBe('log-mean'),
      },
    ),
  ],
  '70 a second row of the header that says lowest, mean and highest': [
    one(
      'joins the names above it',
      file('time,P1,P1,P1', ',min,mean,max', `${A},0.9E-8,1.0E-8,1.1E-8`, `${B},1E-8,2E-8,3E-8`),
      {
        profile: { ...MEANS, readingColumn: 'mean' },
        readings: READ,
        lines: { header: 2, accepted: 2 },
      },
    ),
    one(
      'does not make a row of totals a header',
      file('time,P1,P2', `${A},1E-8,2E-8`, ',max,max', `${B},2E-8,3E-8`),
      {
        profile: MEANS,
        rejected: ['3:unreadable-time'],
        lines: { header: 1, accepted: 2, skipped: 1 },
      },
    ),
  ],
  '70 a value beside its bounds in a row for each channel': [
    one(
      'is the mean, whatever stands beside it',
      file('time,channel,min,mean,max', `${A},P1,0.9E-8,1.0E-8,1.1E-8`, `${B},P1,1E-8,2E-8,3E-8`),
      { profile: MEANS, readings: READ, more: (out) => expect(out.dialect.layout).toBe('long') },
    ),
  ],
}

for (const [title, cases] of Object.entries(CASES))
  describe(title, () => {
    it.each(cases)('$name', check)
  })

describe('70 what was said about columns of means', () => {
  it('holds for the next file of the source, which asks nothing', async () => {
    const context = { channels, ...answers(['reading-of', 'mean'], ['averaging', 'mean']) }
    const { out } = await readFlat(ONLY, OPEN, context)
    const learned = profileWithAnswers(OPEN, out)
    expect(learned).toMatchObject({ version: 2, readingColumn: 'mean', averaging: 'mean' })
    const next = await readFlat(ONLY.replaceAll('11-08', '11-07'), learned, { channels })
    expect(next.out.questions).toEqual([])
    expect(next.readings.map(({ value }) => value)).toEqual([1e-8, 2e-8])
  })
})
