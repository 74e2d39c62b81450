/** Cautions of a heated segment against figures worked out by hand or printed elsewhere, never against the same formula. */
import { describe, expect, test } from 'vitest'
import type { BakedSegment } from '#app/domain/bake-load.ts'
import type { AdoptedThreshold, ThresholdKey } from '#app/domain/hazard-thresholds.ts'
import {
  type HazardGround,
  type HazardView,
  hazardViews,
  STANDING_SENTENCE,
  unadoptedOf,
  valuesInForce,
} from '#app/domain/hazards.ts'
import { emptyPermitContent, type PermitContent } from '#app/domain/permit-content.ts'
import { HAZARD_KEYS, type HazardKey } from '#app/domain/permit-words.ts'

const NOW = new Date('2026-11-09T07:00:00Z')
const LATER = new Date('2027-06-01T00:00:00Z')

function segment(tag: string, own: Partial<BakedSegment> = {}): BakedSegment {
  return {
    tag,
    startM: 600,
    endM: 750,
    innerDiameterM: 0.6,
    wallM: 0.003,
    insulationM: 0.1,
    insulationWPerMK: 0.045,
    resistance20Ohm: 0.019,
    bellowsCount: 10,
    bellowsTravelMm: 34,
    bellowsRatedMm: 45,
    blanketW: 6000,
    feeder: 'west',
    ...own,
  }
}

const content = (own: Partial<PermitContent> = {}): PermitContent => ({
  ...emptyPermitContent(),
  segments: ['SG-05'],
  maxCelsius: 150,
  rampKH: 10,
  supply: 'HX-1',
  ...own,
})

const HX = { tag: 'HX-1', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 }

function ground(own: Partial<HazardGround> = {}): HazardGround {
  return {
    content: content(),
    ambientC: 18,
    segments: [segment('SG-05')],
    supply: HX,
    heaters: [],
    valves: [],
    bay: { volumeM3: 1440, basis: 'for a test' },
    adopted: {},
    ...own,
  }
}

const day = (at: Date) => at.toISOString().slice(0, 10)

function view(key: HazardKey, own: Partial<HazardGround> = {}): HazardView {
  const found = hazardViews(ground(own), [], NOW, day).find((one) => one.key === key)
  if (found === undefined) throw new Error(`no caution ${key}`)
  return found
}

/** Values of the facts, with plain spaces. */
function values(key: HazardKey, own: Partial<HazardGround> = {}): string[] {
  return view(key, own).facts.map(({ value }) => value.replaceAll('\u00a0', ' '))
}

/** Numbers of a figure in text against those of a table, within a share. */
function expectNear(text: string | undefined, expected: readonly number[], share = 0.03): void {
  const found = (text?.match(/\d+(?:\.\d+)?/g) ?? []).map(Number)
  expected.forEach((value, index) => {
    expect(Math.abs((found[index] ?? Number.NaN) / value - 1), `${text} against ${value}`).toBeLessThan(share)
  })
}

function findings(key: HazardKey, own: Partial<HazardGround> = {}): string[] {
  return view(key, own).findings.map((text) => text.replaceAll('\u00a0', ' '))
}

describe('figures of a 0.60 m segment at 150 °C', () => {
  test('grows 337 mm from 20 °C and shares it between ten joints', () => {
    // 17.3e-6/K (data sheets of 304L) × 130 K × 150 m = 337 mm; 33.7 of 45 mm leaves 25 %.
    expect(values('expansion', { ambientC: 20 })).toEqual([
      '337 mm',
      '33.7 mm of 45 mm rated, 25 % in reserve',
    ])
  })

  test('grows 315 mm on 140 m', () => {
    expect(values('expansion', { ambientC: 20, segments: [segment('SG-07', { endM: 740 })] })[0]).toBe(
      '315 mm',
    )
  })

  test('the temperature law of the plans stays within 3 % of it', () => {
    // Check value th.expand: 0.032725 m on 15 m from 20 to 150 °C (EN 1993-1-2 annex C), so 327 mm on 150 m.
    const [fact] = view('expansion', { ambientC: 20 }).facts
    expect(fact?.how.replaceAll('\u00a0', ' ')).toContain('327 mm')
  })

  test('takes 27.3 V at 1267 A at the end of the ramp and 23.4 V at 1083 A in soak; 75 V stand across a gap', () => {
    // Worked table of this tube type: loss 25.3 kW, climb 9.4 kW, 21.6 mΩ hot: √(34 700/0.0216) = 1267 A.
    const [ramp, soak, open] = values('shock')
    expectNear(ramp, [27.3, 1267])
    expectNear(soak, [23.4, 1083])
    expect(open).toBe('75 V')
  })

  test('a blank carries 28.6 kN, 2.9 t, and the vacuum 4.3 MJ', () => {
    // 101 325 × 0.28274 = 28 649 N; 101 325 × 42.41 m³ = 4.297 MJ.
    expect(values('stored-energy')).toEqual(['28.6 kN, the weight of 2.9 t', '4.3 MJ'])
  })

  test('leaves 20.3 % oxygen in a bay of 1440 m³, two of them 19.7 %', () => {
    expect(values('oxygen').slice(0, 2)).toEqual(['20.3 %', '19.7 %'])
  })

  test('the pair’s own volume counts for two', () => {
    // 42.41 + 29.45 = 71.86 m³: 20.9 × e^(−0.0499) = 19.88.
    const pair = [segment('SG-08'), segment('SG-09', { innerDiameterM: 0.5 })]
    expect(values('oxygen', { segments: pair }).slice(0, 2)).toEqual(['20.3 %', '19.9 %'])
  })

  test('the outside of the jacket stays at 24 °C', () => {
    // By hand: 18 + 132 × 0.04974/1.06720.
    expect(values('hot-surface')).toEqual(['up to 150 °C', 'about 24 °C where it is whole'])
  })

  test('cools to 40 °C in 8.7 h once 40 °C is adopted', () => {
    // Worked table of this tube type: 8.7 h with the heat capacity of 150 °C; steel holds less when cooler, some 6 %.
    const cooling = values('hot-surface', { adopted: { 'touch-limit': 40 } })[2]
    expect(cooling).toMatch(/^about \d\.\d h to 40 °C$/)
    expectNear(cooling, [8.7, 40], 0.07)
  })

  test('heats the tunnel with 31.3 kW, which 2.6 m³/s of air carry off at 10 K', () => {
    // 25.3 kW of loss and 6 kW of blankets; 31 300/(1206 × 10) = 2.6.
    expect(values('heat-stress')[0]).toMatch(/^31\.[234] kW$/)
    expect(values('heat-stress')[1]).toBe('2.6 m³/s')
  })

  test('ramps for 13.2 h', () => {
    expect(values('lone-work')[0]).toBe('13.2 h')
  })
})

describe('current', () => {
  test('a joint of 0.1 mΩ gives off 144 W at 1200 A', () => {
    const own = { supply: null, content: content({ supply: null, maxAmps: 1200 }) }
    expect(values('arc', own)).toEqual(['144 W'])
  })

  test('0.51 mT at half a metre of 1270 A, 0.5 mT at 0.51 m', () => {
    const own = {
      supply: null,
      content: content({ supply: null, maxAmps: 1270 }),
      adopted: { 'implant-field': 0.5 },
    }
    expect(values('magnetic-field', own)).toEqual(['0.51 mT', '0.51 m'])
    expect(findings('magnetic-field', own)).toHaveLength(1)
  })

  test('a pair passes 50 V under load at the end of the ramp, one segment only across an open joint', () => {
    // Worked example: a 0.60 m pair takes 54.7 V at the end of the ramp and 46.7 V in soak.
    const pair = { segments: [segment('SG-01'), segment('SG-02')], adopted: { 'shock-volts': 50 } }
    const [ramp, soak] = values('shock', pair)
    expectNear(ramp, [54.7])
    expectNear(soak, [46.7])
    expect(findings('shock', pair)[0]).toMatch(
      /^54\.\d V across the bars .*, 75 V across an open joint: .*50 V/,
    )
    const [alone] = findings('shock', { adopted: { 'shock-volts': 50 } })
    expect(alone).toMatch(/^75 V across an open joint: /)
  })

  test('50 V and above counts, 49 V does not', () => {
    const at = (openCircuitVolts: number) =>
      findings('shock', {
        supply: { ...HX, openCircuitVolts },
        adopted: { 'shock-volts': 50 },
      })
    expect(at(50)).toHaveLength(1)
    expect(at(49)).toEqual([])
  })

  test('a ramp that takes more than the permit allows is said', () => {
    const own = { content: content({ maxVolts: 20, maxAmps: 1000 }) }
    expect(findings('shock', own)).toHaveLength(2)
  })

  test('the earthing point comes from the permit, else from the register, else is missing', () => {
    const earthed = (own: Partial<HazardGround>) =>
      view('shock', own).facts.find(({ name }) => name.startsWith('Earthing'))?.value
    const dc = { tag: 'DC-05', kind: 'direct-current' as const, volts: null, powerW: null, earthing: '675 m' }
    expect(earthed({ heaters: [dc], content: content({ earthing: 'west end' }) })).toBe('west end')
    expect(earthed({ heaters: [dc] })).toBe('DC-05: 675 m')
    expect(earthed({})).toContain('not known')
  })
})

describe('elastomer parts', () => {
  const bonnet = { tag: 'GV-12', seal: 'metal seat, elastomer bonnet', limitC: 120, partRiseShare: 0.7 }

  test('a bonnet at 0.7 of the rise reaches 110 of 120 °C', () => {
    // By hand: 18 + 0.7 × 132 = 110.4.
    expect(values('elastomer', { valves: [bonnet] })).toEqual(['110 °C of 120 °C allowed'])
    expect(findings('elastomer', { valves: [bonnet] })).toEqual([])
  })

  test('and passes it at 170 °C', () => {
    // By hand: 18 + 0.7 × 152 = 124.4.
    const own = { valves: [bonnet], content: content({ maxCelsius: 170 }) }
    expect(findings('elastomer', own)).toEqual([
      'GV-12 would reach 124 °C of 120 °C allowed. Heat less, or take the part off.',
    ])
  })

  test('the lower of the part’s limit and the site’s holds', () => {
    const own = { valves: [bonnet], adopted: { 'elastomer-limit': 100 } }
    expect(values('elastomer', own)).toEqual(['110 °C of 100 °C allowed'])
    expect(findings('elastomer', own)).toHaveLength(1)
  })

  test('without one nothing rests on the limit; a metal valve over its own is a hot surface', () => {
    const metal = { tag: 'GV-05', seal: 'all metal', limitC: 150, partRiseShare: 1 }
    expect(view('elastomer', { valves: [metal] }).thresholds).toEqual([])
    const hotter = { valves: [metal], content: content({ maxCelsius: 160 }) }
    expect(findings('hot-surface', hotter)).toHaveLength(1)
    expect(findings('hot-surface', { valves: [metal] })).toEqual([])
  })
})

describe('venting and stroke', () => {
  test('0.1 bar push on a blank with 2.8 kN, once 0.1 bar is adopted', () => {
    // By hand: 10 000 Pa × 0.28274 m².
    expect(values('vent-pressure')).toEqual(['42.4 m³'])
    expect(values('vent-pressure', { adopted: { 'vent-overpressure': 0.1 } })).toEqual(['42.4 m³', '2.8 kN'])
  })

  test('a reserve below the adopted one, and none at all, are findings', () => {
    // 342.5 mm over 10 joints is 34.3 of 45 mm: 24 %.
    expect(findings('expansion', { adopted: { 'stroke-reserve': 24 } })).toEqual([
      'A joint of SG-05 keeps 24 % of its stroke, less than the 24 % that this site wants.',
    ])
    expect(findings('expansion', { adopted: { 'stroke-reserve': 23 } })).toEqual([])
    expect(findings('expansion', { segments: [segment('SG-05', { bellowsRatedMm: 30 })] })).toHaveLength(1)
  })
})

test('what is the same for both segments of a pair is said once', () => {
  const pair = { segments: [segment('SG-11'), segment('SG-12')] }
  expect(view('stored-energy', pair).facts.map(({ name }) => name)).toEqual([
    'Load of the air on a blank of SG-11 and SG-12, each',
    'Energy held by SG-11 and SG-12, each',
  ])
  const unlike = { segments: [segment('SG-08', { endM: 760 }), segment('SG-07')] }
  expect(view('stored-energy', unlike).facts.map(({ name }) => name)).toEqual([
    'Load of the air on a blank of SG-08 and SG-07, each',
    'Energy held by SG-08',
    'Energy held by SG-07',
  ])
})

test('another temperature gives other figures at once', () => {
  const cooler = { content: content({ maxCelsius: 80 }) }
  for (const key of ['hot-surface', 'shock', 'expansion', 'heat-stress', 'lone-work'] as const)
    expect(values(key, cooler), key).not.toEqual(values(key))
})

test('an empty draft has every hazard, without an answer and without a made-up figure', () => {
  const empty = { content: emptyPermitContent(), segments: [], supply: null }
  const views = hazardViews(ground(empty), [], NOW, day)
  expect(views.map(({ key }) => key)).toEqual([...HAZARD_KEYS])
  expect(views.every(({ applies, text }) => applies === null && text === '')).toBe(true)
  expect(views.flatMap(({ findings: found }) => found)).toEqual([])
  for (const { key, facts } of views)
    for (const { value } of facts)
      expect(value, key).not.toMatch(/NaN|Infinity|undefined|\d (?:kN|MJ|mm|A|mT)$/)
})

test('every caution has precautions, and every fact its working and its source', () => {
  for (const { key, facts, precautions } of hazardViews(ground(), [], NOW, day)) {
    expect(precautions.length, key).toBeGreaterThan(0)
    for (const { how, source } of facts) expect(how !== '' && source !== '', key).toBe(true)
  }
})

function adoption(key: ThresholdKey, own: Partial<AdoptedThreshold> = {}): AdoptedThreshold {
  return {
    id: 1,
    key,
    value: 40,
    unit: '°C',
    source: 'Site rule 7',
    edition: '2',
    reason: 'for a test',
    by: 'Ione',
    at: new Date('2025-09-10T08:00:00Z'),
    reviewAt: LATER,
    endedAt: null,
    endedBy: null,
    ...own,
  }
}

describe('adopted values', () => {
  const touchOf = (adoptions: readonly AdoptedThreshold[], now = NOW) =>
    hazardViews(ground(), adoptions, now, day)
      .find(({ key }) => key === 'hot-surface')
      ?.thresholds.find(({ key }) => key === 'touch-limit')

  test('an adopted one is shown with source, edition, who and until when', () => {
    expect(touchOf([adoption('touch-limit')])).toEqual({
      key: 'touch-limit',
      label: 'Free access',
      standing: 'in-force',
      text: '40\u00a0°C',
      detail: 'Site rule 7, 2; adopted by Ione on 2025-09-10, to be looked at again by 2027-06-01.',
    })
  })

  test('without one the published number does not stand in for it', () => {
    expect(touchOf([])?.text).toBe('not set by site')
    const all = JSON.stringify(hazardViews(ground(), [], NOW, day))
    for (const published of ['43\u00a0°C', '51\u00a0°C', '65\u00a0°C', '50\u00a0V', '19.5', '23.5'])
      expect(all).not.toContain(published)
  })

  test('it counts until its review date and not from it on', () => {
    const one = [adoption('touch-limit')]
    expect(touchOf(one, new Date(LATER.getTime() - 1))?.standing).toBe('in-force')
    expect(touchOf(one, LATER)).toMatchObject({ standing: 'lapsed', text: 'not set by site' })
    expect(valuesInForce(one, new Date(LATER.getTime() - 1))).toEqual({ 'touch-limit': 40 })
    expect(valuesInForce(one, LATER)).toEqual({})
  })

  test('what is not adopted stands in the way, unless its hazard was said not to apply', () => {
    const keys = (answers: PermitContent['hazards']) =>
      unadoptedOf(hazardViews(ground({ content: content({ hazards: answers }) }), [], NOW, day)).map(
        ({ hazard, threshold }) => `${hazard} ${threshold}`,
      )
    const all = keys({})
    expect(all).toContain('shock shock-volts')
    expect(all).toContain('oxygen oxygen-low')
    const without = keys({ oxygen: { applies: false, text: 'no gas line here' } })
    expect(without).not.toContain('oxygen oxygen-low')
    expect(without).toContain('shock shock-volts')
    expect(keys({ shock: { applies: true, text: '' } })).toEqual(all)
  })
})

test('the standing sentence names what overrides the form', () => {
  for (const word of ['local law', 'rules of this site', 'licensed', 'makers'])
    expect(STANDING_SENTENCE).toContain(word)
})
