/** The permit form there and back: what is typed, what it means, and what is refused with which words. */
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { emptyPermitContent, type PermitContent } from '#app/domain/permit-content.ts'
import {
  blankRow,
  mergedValues,
  type PermitFormValues,
  permitFormValues,
  postedValues,
  withRowsChanged,
} from '#app/domain/permit-form-values.ts'
import { HAZARD_KEYS, PERMIT_TEST_KINDS, POINT_PURPOSES } from '#app/domain/permit-words.ts'
import { hoursText, permitFormSchema, RELATED_KINDS, windowHours } from '#app/domain/schemas/permit-form.ts'

const ZONE = 'Europe/Vienna'
const schema = permitFormSchema(ZONE)
const EMPTY = permitFormValues(emptyPermitContent(), ZONE)

/** A form as a browser sends it: dotted names, one field a text, a name again for each ticked box. */
function posted(values: PermitFormValues): FormData {
  const form = new FormData()
  const put = (name: string, value: unknown): void => {
    if (typeof value === 'string') form.append(name, value.replaceAll('\n', '\r\n'))
    else if (name === 'deputyIds' || name === 'crewIds')
      for (const one of value as string[]) form.append(name, one)
    else
      for (const [key, inner] of Object.entries(value as object))
        put(name === '' ? key : `${name}.${key}`, inner)
  }
  put('', values)
  return form
}

function read(values: Partial<PermitFormValues>): PermitContent {
  return schema.parse({ ...EMPTY, ...values })
}

function faults(values: Partial<PermitFormValues>): Record<string, string> {
  const parsed = schema.safeParse({ ...EMPTY, ...values })
  if (parsed.success) return {}
  return Object.fromEntries(parsed.error.issues.map(({ path, message }) => [path.join('.'), message]))
}

const word = (most: number) =>
  fc
    .string({ unit: 'grapheme', maxLength: most })
    .map((text) => text.replaceAll('\r', '').trim())
    .filter((text) => text.length <= most)
const said = (most: number) => word(most).filter((text) => text !== '')
const orNull = <Value>(one: fc.Arbitrary<Value>) => fc.option(one, { nil: null })
const amount = (low: number, high: number) =>
  orNull(fc.double({ min: low, max: high, noNaN: true }).map((value) => value + 0))
const someone = fc.integer({ min: 1, max: 999 })
// Tags are typed into one field, with commas and line ends between them.
const tag = (most: number) =>
  fc.stringMatching(/^[A-Z]{1,3}-[0-9]{1,6}$/).filter((text) => text.length <= most)
const second = (from: string, to: string) =>
  fc
    .integer({ min: Date.parse(from) / 1000, max: Date.parse(to) / 1000 })
    .map((seconds) => new Date(seconds * 1000).toISOString())

const contents: fc.Arbitrary<PermitContent> = fc
  .record({
    title: word(200),
    related: fc.array(fc.record({ kind: fc.constantFrom(...RELATED_KINDS), number: said(50) }), {
      maxLength: 4,
    }),
    planId: orNull(someone),
    planVersion: orNull(someone),
    segments: fc.uniqueArray(tag(12), { maxLength: 2 }),
    fromM: amount(0, 900),
    toM: amount(900.1, 100_000),
    bays: word(200),
    exclusionWestM: amount(0, 100),
    exclusionEastM: amount(0, 100),
    equipment: fc.uniqueArray(tag(12), { maxLength: 6 }),
    work: word(300),
    notIncluded: word(300),
    maxCelsius: amount(20, 400),
    rampKH: amount(0.001, 60),
    soakHours: amount(0, 2000),
    supply: orNull(tag(12)),
    maxAmps: amount(0, 20_000),
    maxVolts: amount(0, 1000),
    openCircuitVolts: amount(0, 1000),
    earthing: word(200),
    unattended: orNull(fc.boolean()),
    nightCover: word(200),
    annex: fc.record({ alarms: word(90), onCallMinutes: amount(0.5, 600), shutOff: word(90) }),
    holderId: orNull(fc.integer({ min: 1, max: 9 })),
    deputyIds: fc.uniqueArray(fc.integer({ min: 10, max: 99 }), { maxLength: 6 }),
    crewIds: fc.uniqueArray(someone, { maxLength: 20 }),
    isolatingPersonId: orNull(someone),
    electricianId: orNull(someone),
    attendantId: orNull(someone),
    // Windows that begin and end about the nights on which Vienna's clocks change.
    window: fc.oneof(
      fc.tuple(
        second('2026-10-24T18:00:00Z', '2026-10-25T00:59:59Z'),
        second('2026-10-25T01:00:00Z', '2026-10-25T18:00:00Z'),
      ),
      fc.tuple(
        second('2027-03-27T18:00:00Z', '2027-03-28T00:59:59Z'),
        second('2027-03-28T01:00:00Z', '2027-03-29T00:00:00Z'),
      ),
      fc.tuple(fc.constant(null), second('2026-01-01T00:00:00Z', '2029-01-01T00:00:00Z')),
      fc.tuple(fc.constant(null), fc.constant(null)),
    ),
    shifts: word(200),
    hazards: fc
      .dictionary(fc.constantFrom(...HAZARD_KEYS), fc.record({ applies: fc.boolean(), text: word(90) }))
      .map((answers) => answers as PermitContent['hazards']),
    points: fc.uniqueArray(
      fc.record({
        tag: said(20),
        isolates: said(60),
        required: said(60),
        purpose: fc.constantFrom(...POINT_PURPOSES),
        boxed: fc.boolean(),
      }),
      { maxLength: 6, selector: (point) => point.tag.toUpperCase() },
    ),
    tests: fc.array(
      fc.record({
        kind: fc.constantFrom(...PERMIT_TEST_KINDS),
        place: word(60),
        low: amount(-1000, 0),
        high: amount(0, 1e6),
        unit: word(8),
        everyHours: amount(0.25, 240),
      }),
      { maxLength: 5 },
    ),
    protectiveEquipment: word(90),
    barriers: word(90),
    signs: word(90),
    lighting: word(90),
    rescue: word(90),
    assemblyPoint: word(90),
    contacts: fc.array(fc.record({ role: said(40), name: word(40), phone: said(30) }), { maxLength: 4 }),
  })
  .map(({ window: [from, to], ...rest }) => ({ ...rest, from, to }))

describe('there and back', () => {
  test('nothing said stays nothing said', () => {
    expect(schema.parse(EMPTY)).toEqual(emptyPermitContent())
    expect(schema.parse(postedValues(new FormData()))).toEqual(emptyPermitContent())
  })

  test('any content comes back from the form as it was, in the browser and as posted', () => {
    fc.assert(
      fc.property(contents, (content) => {
        const values = permitFormValues(content, ZONE)
        expect(schema.parse(values)).toEqual(content)
        expect(schema.parse(postedValues(posted(values)))).toEqual(content)
      }),
      { numRuns: 100 },
    )
  })

  test('rows keep their order where their numbers have gaps', () => {
    const form = new FormData()
    form.set('contacts.10.role', 'Fire brigade')
    form.set('contacts.10.phone', '122')
    form.set('contacts.2.role', 'Control room')
    form.set('contacts.2.phone', '4400')
    expect(schema.parse(postedValues(form)).contacts.map(({ role }) => role)).toEqual([
      'Control room',
      'Fire brigade',
    ])
  })

  test('a row left blank is no row, and does not shift what is said of the one after it', () => {
    const blank = blankRow('points', EMPTY)
    const half = { ...blank, tag: 'IP-2', isolates: 'NV-05, vent valve' }
    expect(read({ points: [blank], contacts: [blankRow('contacts', EMPTY)] }).points).toEqual([])
    expect(Object.keys(faults({ points: [blank, half] }))).toEqual(['points.1.required'])
  })
})

describe('figures', () => {
  test.each([
    ['26,9', 26.9],
    ['26.9', 26.9],
    [' 1270 ', 1270],
    ['1 270', 1270],
    ['1\u202f270,5', 1270.5],
    ['0,125', 0.125],
    ['1.083', 1.083],
    ['', null],
  ])('"%s" is %s amperes', (typed, amps) => {
    expect(read({ maxAmps: typed }).maxAmps).toBe(amps)
  })

  test('a comma that some read as a thousand is asked about', () => {
    expect(faults({ maxAmps: '1,083' }).maxAmps).toContain('can be read as 1083 or as 1.083')
  })

  test.each(['hot', '12 50', '1.2.3', '0x10', 'Infinity', '1e400', '-5', '--'])(
    '"%s" is refused with the range it has to lie in',
    (typed) => {
      expect(faults({ maxVolts: typed }).maxVolts).toMatch(/Give a number from 0 to 1000 V\.$/)
    },
  )

  test('a ramp of nothing is none', () => {
    expect(faults({ rampKH: '0' }).rampKH).toBe('"0" does not do. Give a number above 0 and up to 60 °C/h.')
  })
})

describe('the window', () => {
  test('the hour that comes twice in autumn wants its offset, and gets an hour more than the clocks show', () => {
    const from = '2026-10-24 12:00'
    expect(faults({ from, to: '2026-10-25 02:30' }).to).toContain('2026-10-25 02:30 +02:00')
    const first = read({ from, to: '2026-10-25 02:30 +02:00' })
    const last = read({ from, to: '2026-10-25 02:30 +01:00' })
    expect(windowHours(String(first.from), String(first.to))).toBe(14.5)
    expect(windowHours(String(last.from), String(last.to))).toBe(15.5)
  })

  test('the hour that spring leaves out is no time', () => {
    expect(faults({ from: '2027-03-28 02:30' }).from).toBe(
      'This time does not exist: that night the clock is put forward. Give a time before or after the gap.',
    )
  })

  test('240 hours are counted as they pass: ten days on the calendar are too many in autumn, and one less in spring', () => {
    expect(faults({ from: '2026-11-04 06:00', to: '2026-11-14 06:00' })).toEqual({})
    expect(faults({ from: '2026-10-20 06:00', to: '2026-10-30 06:00' }).to).toContain('241 h long')
    expect(faults({ from: '2026-10-20 06:00', to: '2026-10-30 05:00' })).toEqual({})
    expect(faults({ from: '2027-03-25 06:00', to: '2027-04-04 07:00' })).toEqual({})
    expect(faults({ from: '2027-03-25 06:00', to: '2027-04-04 07:01' }).to).toContain('240 h 1 min long')
  })

  test('it ends after it begins', () => {
    expect(faults({ from: '2026-11-04 06:00', to: '2026-11-04 06:00' }).to).toContain('ends before it begins')
  })

  test('hours with their minutes', () => {
    expect([hoursText(228), hoursText(227.5), hoursText(0.25), hoursText(59.999)]).toEqual([
      '228 h',
      '227 h 30 min',
      '0 h 15 min',
      '60 h',
    ])
  })
})

describe('what two fields together cannot say', () => {
  test('one segment twice, a second without a first, a stretch that ends before it begins', () => {
    expect(faults({ segment: 'SG-11', second: 'SG-11' }).second).toContain('SG-11 is named twice')
    expect(faults({ second: 'SG-12' }).segment).toContain('name the first')
    expect(faults({ fromM: '750', toM: '600' }).toM).toContain('more than 750 m')
  })

  test('the holder is not their own deputy', () => {
    expect(faults({ holderId: '4', deputyIds: ['3', '4'] }).deputyIds).toContain('own deputy')
  })

  test('two points of one tag, and limits the wrong way round', () => {
    const point = { ...blankRow('points', EMPTY), tag: 'IP-1', isolates: 'GV-04', required: 'shut' }
    expect(Object.keys(faults({ points: [point, blankRow('points', EMPTY), point] }))).toEqual([
      'points.2.tag',
    ])
    const oxygen = { kind: 'oxygen', place: '', low: '23,5', high: '19,5', unit: '%', everyHours: '' }
    expect(faults({ tests: [oxygen] })['tests.0.high']).toContain('23.5')
  })

  test('an answer to a hazard is a yes or a no', () => {
    expect(read({}).hazards).toEqual({})
    const hazards = { ...EMPTY.hazards, fire: { applies: 'on', text: '' } }
    expect(faults({ hazards })['hazards.fire.applies']).toBe('Answer with yes or no.')
  })

  test('text that is too long says how long it is', () => {
    expect(faults({ title: 'x'.repeat(201) }).title).toContain('201 characters long and at most 200 fit')
  })
})

describe('rows and merging', () => {
  test('buttons add and take out rows; another button changes nothing', () => {
    const one = withRowsChanged({ ...EMPTY, segment: 'SG-05' }, 'add:points')
    expect(one?.points.map(({ tag }) => tag)).toEqual(['IP-05-1'])
    const two = withRowsChanged(one ?? EMPTY, 'add:points')
    expect(two?.points.map(({ tag }) => tag)).toEqual(['IP-05-1', 'IP-05-2'])
    const left = withRowsChanged(two ?? EMPTY, 'remove:points:0')
    expect(left?.points.map(({ tag }) => tag)).toEqual(['IP-05-2'])
    // The tag that is taken is passed over.
    expect(withRowsChanged(left ?? EMPTY, 'add:points')?.points.map(({ tag }) => tag)).toEqual([
      'IP-05-2',
      'IP-05-3',
    ])
    expect(withRowsChanged(EMPTY, 'save')).toBeNull()
    expect(withRowsChanged(EMPTY, 'add:hazards')).toBeNull()
  })

  test('a list that is full takes no more', () => {
    let values: PermitFormValues = EMPTY
    for (let count = 0; count < 15; count += 1) values = withRowsChanged(values, 'add:contacts') ?? values
    expect(values.contacts).toHaveLength(12)
  })

  test('who changed a field has it; where both did, the typed one stands and is named', () => {
    const base = { ...EMPTY, title: 'Bake', maxCelsius: '150', work: 'Bake of SG-05\nand back' }
    const typed = { ...base, title: 'Bake of SG-05', maxCelsius: '140', work: 'Bake of SG-05\r\nand back ' }
    const saved = { ...base, maxCelsius: '130', bays: '600 to 750 m', work: 'Bake of SG-05' }
    const { values, both } = mergedValues(base, typed, saved)
    expect(values).toMatchObject({
      title: 'Bake of SG-05',
      maxCelsius: '140',
      bays: '600 to 750 m',
      work: 'Bake of SG-05',
    })
    expect(both).toEqual(['maxCelsius'])
  })

  test('the same change by both is no matter', () => {
    const changed = { ...EMPTY, maxCelsius: '140' }
    expect(mergedValues(EMPTY, changed, { ...changed })).toEqual({ values: changed, both: [] })
  })
})
