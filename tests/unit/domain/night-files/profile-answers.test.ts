import { describe, expect, it } from 'vitest'
import { profileWithAnswers } from '#app/domain/night-files/profile-answers.ts'
import type { Answer, ReadContext } from '#app/domain/night-files/types.ts'
import { emptyProfile, type SourceProfile, SourceProfileSchema } from '#app/domain/schemas/source-profile.ts'
import { file } from '#tests/fixtures/night-files/cases.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture, readFlat } from '#tests/fixtures/night-files/read.ts'

const pressure = (...names: string[]) => names.map((name) => ({ name, quantity: 'pressure' as const }))

/** Reads, answers every question by its id, and returns the profile that follows. */
async function learn(
  text: string,
  profile: SourceProfile | null,
  choices: Record<string, string>,
  context: Partial<ReadContext> = {},
): Promise<SourceProfile | null> {
  const asked = await readFlat(text, profile, context)
  expect(asked.out.questions.map(({ id }) => id)).toEqual(Object.keys(choices))
  const answers: Answer[] = asked.out.questions.map(({ id, text: said, found }) => ({
    id,
    choice: choices[id] ?? '',
    text: said,
    found,
  }))
  const { out } = await readFlat(text, profile, { ...context, answers })
  expect(out.state).toBe('readable')
  expect(out.questions).toEqual([])
  return profileWithAnswers(profile ?? emptyProfile(), out)
}

const FIRST = file('time;A;B', '03/04/2026 06:00;1.0;2.0', '03/04/2026 06:10;1.1;PUMPED')
const FIRST_ANSWERS = {
  'date-order': 'dmy',
  zone: 'Europe/Vienna',
  'unknown-channel:A': 'P1',
  'unknown-channel:B': 'P2',
  unit: 'mbar',
  'unknown-word:pumped': 'off',
  basis: 'corrected:H2',
}

describe('what is learnt from the first file of a source', () => {
  it('becomes a profile under which the next file needs no question', async () => {
    const context = { channels: pressure('P1', 'P2') }
    // The order and the zone have to be known before the rows can be looked at.
    const first = await readFlat(FIRST, null, context)
    expect(first.out.questions.map(({ id }) => id)).toContain('date-order')
    const answers = Object.entries(FIRST_ANSWERS).map(([id, choice]) => ({
      id,
      choice,
      found: first.out.questions.find((question) => question.id === id)?.found ?? '',
    }))
    const { out } = await readFlat(FIRST, null, { ...context, answers })
    expect(out.state).toBe('readable')
    expect(out.questions).toEqual([])
    const profile = profileWithAnswers(emptyProfile(), out)
    expect(profile).toMatchObject({
      version: 2,
      layout: 'wide',
      separator: ';',
      decimalMark: '.',
      unit: 'mbar',
      unitInFile: false,
      time: { format: 'dmy', dateMark: '/', zone: 'Europe/Vienna' },
      words: { pumped: 'off' },
      basis: { kind: 'corrected', gas: 'H2' },
    })
    const next = file('time;A;B', '04/04/2026 06:00;1.0;PUMPED')
    const { out: quiet, readings } = await readFlat(next, profile, context)
    expect(quiet.state).toBe('readable')
    expect(quiet.questions).toEqual([])
    expect(readings).toMatchObject([
      { channel: 'P1', at: '2026-04-04T04:00:00.000Z', value: 100, quality: 'good' },
      { channel: 'P2', value: null, quality: 'off' },
    ])
  })
})

describe('a file that departs from its profile', () => {
  const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))

  it('says nothing new when it agrees', async () => {
    const { out } = await readFlat(night(), NL_W)
    expect(profileWithAnswers(NL_W, out)).toBeNull()
  })

  it('is asked about, and the answer makes the next version', async () => {
    const torr = night().replace('mbar', 'Torr')
    const next = await learn(torr, NL_W, { unit: 'Torr' })
    expect(next).toMatchObject({ version: 2, unit: 'Torr', unitInFile: true })
    expect((await readFlat(torr, next)).out.questions).toEqual([])
    // The old unit departs from the new profile, so it is asked about again.
    expect((await readFlat(night(), next)).out.questions.map(({ id }) => id)).toEqual(['unit'])
  })

  it('is asked about when its dates are written with another mark', async () => {
    const { out } = await readFlat(
      file('# Einheit: mbar', 'Zeit;HC-01A', '11/06/2026 06:01;6,4E-10', '11/06/2026 06:02;6,4E-10'),
      NL_W,
    )
    expect(out.questions.map(({ id }) => id)).toEqual(['date-order'])
  })
})

describe('single answers', () => {
  const ISO = SourceProfileSchema.parse({
    layout: 'wide',
    separator: ';',
    decimalMark: '.',
    unit: 'Pa',
    unitInFile: false,
    time: { format: 'iso', zone: 'UTC' },
    basis: { kind: 'nitrogen-equivalent' },
  })
  const row = (cells: string) => `2026-11-08T06:00:00Z;${cells}`

  it('a doubtful unit is kept by its name', async () => {
    const text = file('time;P1 (psig)', row('1.0'))
    expect(await learn(text, ISO, { 'unit-word:psig': 'psi' })).toMatchObject({ units: { psig: 'psi' } })
  })

  it('a channel to ignore is ignored from now on, in long files too', async () => {
    const text = file('time;channel;value;unit', row('P1;1.0;Pa'), row('P9;2.0;Pa'))
    const context = { channels: pressure('P1') }
    const next = await learn(text, { ...ISO, layout: 'long' }, { 'unknown-channel:P9': 'leave-out' }, context)
    expect(next?.columns).toMatchObject([{ inFile: 'P9', channel: null }])
    const { out } = await readFlat(text, next, context)
    expect(out.questions).toEqual([])
    expect(out.lines.skippedBy).toEqual({ 'left-out': 1 })
  })

  it('columns without a header are kept in their order', async () => {
    const text = file(row('1.0;7'), row('1.0;8').replace('06:00', '06:10'))
    const context = { channels: pressure('P1', 'P2') }
    const next = await learn(text, ISO, { 'column:2': 'P1', 'column:3': 'leave-out' }, context)
    expect(next?.columnOrder).toEqual(['time', 'P1', '-'])
    expect((await readFlat(text, next, context)).out.questions).toEqual([])
  })

  it('a clock without clock changes becomes the zone', async () => {
    const text = file('time;P1', '2026-03-29 02:10;1.0', '2026-03-29 03:10;1.0')
    const next = await learn(
      text,
      { ...ISO, time: { ...ISO.time, zone: 'Europe/Vienna' } },
      { 'clock-changes': '+01:00' },
    )
    expect(next?.time.zone).toBe('+01:00')
  })

  it('what concerns one file only is not kept', async () => {
    const text = file('time;P1', '2026-11-08 06:00;1.0', '2000-01-01 00:00;1.1')
    expect(await learn(text, ISO, { 'clock-reset:3': '2026-11-08 06:10' })).toBeNull()
  })
})
