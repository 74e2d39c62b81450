import { describe, expect, it } from 'vitest'
import { EDITED_KINDS, editedSchema, KIND_FACTS } from '#app/domain/schemas/register.ts'

const ZONE = 'Europe/Vienna'
const FRAME = { revision: '3', validFrom: '2026-11-09T08:00', reason: 'Measured again' }

const SEGMENT = {
  startM: '1500',
  endM: '1650',
  innerDiameterM: '0,50',
  wallM: '0.003',
  steel: '304L',
  lastBakeYear: '',
  hydrogenModel: 'diffusion',
  hydrogenC0: '7e23',
  hydrogenQ20: '',
  hydrogenOrigin: 'Assumed for unfired steel',
  waterCapacity: '1e19',
  waterOrigin: 'Assumed',
  bellowsCount: '10',
  bellowsTravelMm: '34',
  bellowsRatedMm: '45',
  insulationM: '0.1',
  insulationWPerMK: '0.045',
  resistance20Ohm: '0.0228',
  feeder: '',
}

function faults(kind: (typeof EDITED_KINDS)[number], form: Record<string, string>, isNew = false) {
  const parsed = editedSchema(kind, ZONE, isNew).safeParse(form)
  return Object.fromEntries(
    (parsed.error?.issues ?? []).map(({ path, message }) => [path.join('.'), message]),
  )
}

describe('forms of the register', () => {
  it('reads a segment as a browser sends it', () => {
    const read = editedSchema('segments', ZONE).parse({ ...SEGMENT, ...FRAME })
    expect(read).toMatchObject({
      revision: 3,
      reason: 'Measured again',
      validFrom: new Date('2026-11-09T07:00:00Z'),
      tag: '',
    })
    expect(read.values).toMatchObject({
      innerDiameterM: 0.5,
      vacuumFired: false,
      lastBakeYear: null,
      hydrogenC0: 7e23,
      hydrogenQ20: null,
    })
    expect(Object.keys(read.values).sort()).toEqual(KIND_FACTS.segments.fields.map(({ name }) => name).sort())
  })

  it('takes a feeder, takes that nobody knows it, and names both where it is given another', () => {
    const feederOf = (feeder: string) =>
      editedSchema('segments', ZONE).parse({ ...SEGMENT, ...FRAME, feeder }).values.feeder
    expect(feederOf('east')).toBe('east')
    expect(feederOf('')).toBeNull()
    const wanted = { feeder: 'Choose one: Not known, Feeder west, Feeder east.' }
    expect(faults('segments', { ...SEGMENT, ...FRAME, feeder: 'north' })).toEqual(wanted)
    const { feeder: _, ...without } = SEGMENT
    expect(faults('segments', { ...without, ...FRAME })).toEqual(wanted)
  })

  it('wants the figure that the hydrogen model needs', () => {
    expect(faults('segments', { ...SEGMENT, ...FRAME, hydrogenModel: 'low-hydrogen' })).toEqual({
      hydrogenQ20: 'The low-hydrogen model needs the outgassing at 20 °C, such as 4e-10.',
    })
  })

  it('refuses a segment that ends before it starts', () => {
    expect(Object.keys(faults('segments', { ...SEGMENT, ...FRAME, endM: '1400' }))).toEqual(['endM'])
  })

  it('names every empty field that must be given', () => {
    const missing = Object.keys(faults('segments', { revision: '1' }))
    expect(missing).toEqual(
      expect.arrayContaining(['startM', 'steel', 'hydrogenModel', 'validFrom', 'reason']),
    )
    expect(missing).not.toContain('vacuumFired')
  })

  it('asks for a name only of a new thing', () => {
    const pump = {
      kind: 'roughing-set',
      ultimatePa: '0.1',
      note: '',
      ...FRAME,
      ...Object.fromEntries(
        KIND_FACTS.pumps.fields.filter(({ gas }) => gas !== null).map(({ name }) => [name, '']),
      ),
    }
    expect(faults('pumps', pump)).toEqual({})
    expect(Object.keys(faults('pumps', pump, true))).toEqual(['tag'])
    expect(faults('pumps', { ...pump, tag: 'RS-3' }, true)).toEqual({})
  })

  it('takes no renaming of a thing that is there', () => {
    expect(
      Object.keys(
        faults('supply-sets', {
          maxAmps: '1500',
          maxVolts: '60',
          openCircuitVolts: '75',
          note: '',
          ...FRAME,
          tag: 'HX-9',
        }),
      ),
    ).toEqual(['tag'])
  })

  it('refuses a supply set that gives more under load than open', () => {
    expect(
      Object.keys(
        faults('supply-sets', {
          maxAmps: '1500',
          maxVolts: '80',
          openCircuitVolts: '75',
          note: '',
          ...FRAME,
        }),
      ),
    ).toEqual(['openCircuitVolts'])
  })

  it('gives every field of a kind its own name', () => {
    for (const kind of EDITED_KINDS) {
      const names = KIND_FACTS[kind].fields.map(({ name }) => name)
      expect(new Set(names).size, kind).toBe(names.length)
      expect(
        names.some((name) => ['tag', 'revision', 'validFrom', 'reason', 'intent'].includes(name)),
        kind,
      ).toBe(false)
    }
  })
})
