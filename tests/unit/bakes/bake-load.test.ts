/** Loads of heated segments against the site's published power table (worked out apart from this code) and by hand. */
import { describe, expect, test } from 'vitest'
import {
  ampsAndVolts,
  type BakedSegment,
  coolHours,
  pairObjection,
  powerByHour,
  powerW,
} from '../../../app/domain/bake-load.ts'

const AMBIENT = 18

function segment(diameter: number, length: number, ohm: number, wall = 0.003): BakedSegment {
  return {
    tag: `T-${diameter}-${length}`,
    startM: 0,
    endM: length,
    innerDiameterM: diameter,
    wallM: wall,
    insulationM: 0.1,
    insulationWPerMK: 0.045,
    resistance20Ohm: ohm,
    bellowsCount: 10,
    bellowsTravelMm: 34,
    bellowsRatedMm: 45,
    blanketW: 6000,
    feeder: 'west',
  }
}
const wide = segment(0.6, 150, 0.019)
const narrow = segment(0.5, 150, 0.0228)

/** Loss kW, heat-up term kW at 10 K/h, soak A, ramp-end A, soak V, ramp-end V, MWh of 13 h ramp and 168 h soak, 150 to 40 °C h. */
const TABLE: [string, BakedSegment, number, number, number, number, number, number, number, number][] = [
  ['0.60 m × 150 m', wide, 25.3, 9.4, 1083, 1267, 23.4, 27.3, 4.5, 8.7],
  ['0.60 m × 140 m', segment(0.6, 140, 0.0177), 23.6, 8.7, 1083, 1267, 21.8, 25.5, 4.2, 8.7],
  ['0.60 m × 160 m', segment(0.6, 160, 0.0203), 27.0, 10.0, 1083, 1267, 24.9, 29.2, 4.8, 8.7],
  ['0.50 m × 150 m', narrow, 21.6, 7.8, 914, 1067, 23.7, 27.6, 3.9, 8.5],
  ['0.35 m × 90 m', segment(0.35, 90, 0.0234, 0.0025), 9.7, 2.7, 603, 683, 16.0, 18.1, 1.7, 6.7],
]

describe.each(TABLE)('%s', (_, one, loss, climb, soakA, rampA, soakV, rampV, megawattHours, cooling) => {
  const near = (value: number, expected: number, share = 0.03) =>
    expect(Math.abs(value / expected - 1), `${value} against ${expected}`).toBeLessThan(share)

  test('power to hold 150 °C and to climb there', () => {
    const hold = powerW(one, AMBIENT, 150, 0).tubeW / 1000
    near(hold, loss)
    near(powerW(one, AMBIENT, 150, 10).tubeW / 1000 - hold, climb, 0.05)
  })

  test('current and voltage', () => {
    const soak = ampsAndVolts([one], AMBIENT, 150, 0)
    const ramp = ampsAndVolts([one], AMBIENT, 150, 10)
    near(soak.amps, soakA)
    near(soak.volts, soakV)
    near(ramp.amps, rampA)
    near(ramp.volts, rampV)
  })

  test('energy of a bake without the blankets', () => {
    const hours = powerByHour([{ ...one, blanketW: 0 }], AMBIENT, {
      celsius: 150,
      upKH: 10,
      holdHours: 168,
      downKH: null,
    })
    // Each hour counts with its highest power, so the sum lies a little above the energy itself.
    near(hours.reduce((sum, watts) => sum + watts, 0) / 1e6, megawattHours, 0.04)
  })

  test('natural cooling from 150 to 40 °C', () => {
    // The table holds the heat capacity at its value at 150 °C; steel holds less heat when cooler, so it cools 5 to 6.5 % faster.
    const share = coolHours(one, AMBIENT, 150, 40) / cooling
    expect(share).toBeGreaterThan(0.935)
    expect(share).toBeLessThan(0.95)
  })
})

describe('pairs and hours', () => {
  test('pairs in series: 62.6 and 81.3 kW, 55.3 and 70.9 kW with their blankets; 54.7 and 55.2 V at the end of the ramp', () => {
    const pairKW = (one: BakedSegment, rate: number) => (2 * powerW(one, AMBIENT, 150, rate).totalW) / 1000
    expect(pairKW(wide, 0)).toBeCloseTo(62.6, 0)
    expect(Math.abs(pairKW(wide, 10) / 81.3 - 1)).toBeLessThan(0.01)
    expect(pairKW(narrow, 0)).toBeCloseTo(55.3, 0)
    expect(Math.abs(pairKW(narrow, 10) / 70.9 - 1)).toBeLessThan(0.01)
    expect(Math.abs(ampsAndVolts([wide, wide], AMBIENT, 150, 10).volts / 54.7 - 1)).toBeLessThan(0.01)
    expect(Math.abs(ampsAndVolts([narrow, narrow], AMBIENT, 150, 10).volts / 55.2 - 1)).toBeLessThan(0.01)
  })

  test('the highest hour of a bake is the last of its ramp, not one of its soak', () => {
    const hours = powerByHour([wide], AMBIENT, { celsius: 150, upKH: 10, holdHours: 24, downKH: null })
    expect(hours).toHaveLength(38)
    const highest = Math.max(...hours)
    expect(hours.indexOf(highest)).toBe(13)
    expect(highest).toBeCloseTo(powerW(wide, AMBIENT, 150, 10).totalW, 0)
    expect(hours[20]).toBeCloseTo(powerW(wide, AMBIENT, 150, 0).totalW, 0)
  })

  test('a slow way down needs heat, a natural one does not', () => {
    const slow = powerByHour([wide], AMBIENT, { celsius: 150, upKH: 10, holdHours: 0, downKH: 5 })
    const free = powerByHour([wide], AMBIENT, { celsius: 150, upKH: 10, holdHours: 0, downKH: null })
    expect(slow.length).toBeGreaterThan(free.length)
    expect(slow[15]).toBeGreaterThan(10_000)
  })

  test('tubes of one diameter go in series, of two they do not: about 30 kW where 21.6 are needed', () => {
    expect(pairObjection(wide, { ...wide, tag: 'other' })).toBeNull()
    const words = pairObjection(wide, narrow) ?? ''
    expect(words).toContain('0.60 m')
    expect(words).toContain('0.50 m')
    const [, got = '0', needed = '0'] = /would give .* ([\d.]+) kW against the ([\d.]+) kW/.exec(words) ?? []
    expect(Math.abs(Number(got) / 30 - 1)).toBeLessThan(0.03)
    expect(Math.abs(Number(needed) / 21.6 - 1)).toBeLessThan(0.01)
    expect(pairObjection(narrow, wide)).toBe(
      words.replace(
        `${wide.tag} (0.60 m) and ${narrow.tag} (0.50 m)`,
        `${narrow.tag} (0.50 m) and ${wide.tag} (0.60 m)`,
      ),
    )
  })
})
