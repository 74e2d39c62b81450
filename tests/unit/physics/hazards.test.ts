/** Figures of safety against values worked out by hand; each says where it comes from. */
import { expect, test } from 'vitest'
import { PhysicsError } from '#app/physics/errors.ts'
import {
  airForRise,
  coverForce,
  evacuatedEnergy,
  fieldDistance,
  jacketSkinK,
  jointHeat,
  oxygenAfterInflow,
  SHEET_EXPANSION_PER_K,
  straightConductorField,
} from '#app/physics/hazards.ts'

test('a blank of 0.6 m under vacuum carries 28.6 kN', () => {
  // By hand: 101 325 Pa × 0.28274 m² = 28 649 N, or 2 921 kgf.
  expect(coverForce(0.6)).toBeCloseTo(28_649, 0)
  expect(coverForce(0.6) / 9.80665).toBeCloseTo(2921, 0)
})

test('a blank of 0.6 m over 0.1 bar carries 2.8 kN outwards', () => {
  // By hand: 10 000 Pa × 0.28274 m².
  expect(coverForce(0.6, 1e4)).toBeCloseTo(2827.4, 1)
})

test('42.4 m³ of vacuum hold 4.3 MJ', () => {
  // By hand: 101 325 × 42.4 = 4.296e6.
  expect(evacuatedEnergy(42.4)).toBeCloseTo(4_296_180, 0)
})

test('a joint of 0.1 mΩ at 1200 A gives off 144 W', () => {
  expect(jointHeat(1200, 1e-4)).toBeCloseTo(144, 9)
})

test('1270 A make half a millitesla at half a metre', () => {
  // By hand: 4πe-7 × 1270 / (2π × 0.5) = 5.08e-4 T (Ampère's law, textbook).
  expect(straightConductorField(1270, 0.5)).toBeCloseTo(5.08e-4, 9)
  expect(fieldDistance(1270, 5e-4)).toBeCloseTo(0.508, 9)
})

test('nitrogen of one segment leaves 20.3 % oxygen in a bay of 1440 m³, of two 19.7 %', () => {
  // By hand: 20.9 × exp(-42.4/1440) = 20.9 × 0.97098 = 20.294; squared factor: 20.9 × 0.94281 = 19.705.
  expect(oxygenAfterInflow(42.4, 1440)).toBeCloseTo(20.294, 3)
  expect(oxygenAfterInflow(84.8, 1440)).toBeCloseTo(19.705, 3)
  expect(oxygenAfterInflow(0, 1440)).toBe(20.9)
})

test('a 100 mm jacket on a tube at 150 °C is barely warm', () => {
  // By hand: ln(0.8/0.6)/(2π × 0.045) = 1.01746, 1/(2π × 0.4 × 8) = 0.04974 m K/W;
  // 18 + 132 × 0.04974/1.06720 = 24.15 °C.
  const skin = jacketSkinK(
    { diameterM: 0.6, tubeK: 423.15, ambientK: 291.15 },
    { thicknessM: 0.1, conductivityWMK: 0.045 },
  )
  expect(skin - 273.15).toBeCloseTo(24.15, 2)
})

test('a jacket of almost nothing is as hot as its tube', () => {
  const skin = jacketSkinK(
    { diameterM: 0.6, tubeK: 423.15, ambientK: 291.15 },
    { thicknessM: 1e-6, conductivityWMK: 0.045 },
  )
  expect(skin).toBeCloseTo(423.13, 1)
})

test('the sheet value of expansion gives 337 mm on 150 m from 20 to 150 °C', () => {
  // By hand: 17.3e-6 × 130 × 150 = 0.33735 m.
  expect(SHEET_EXPANSION_PER_K * 130 * 150).toBeCloseTo(0.33735, 6)
})

test('25.3 kW warm 2.1 m³/s of air by ten kelvins', () => {
  // By hand: 25 300 / (1.2 × 1005 × 10) = 2.098.
  expect(airForRise(25_300, 10)).toBeCloseTo(2.098, 3)
})

test.each([
  ['coverForce', () => coverForce(0)],
  ['coverForce below nothing', () => coverForce(0.6, -1)],
  ['evacuatedEnergy', () => evacuatedEnergy(Number.NaN)],
  ['jointHeat', () => jointHeat(-1, 1e-4)],
  ['straightConductorField', () => straightConductorField(1000, 0)],
  ['oxygenAfterInflow', () => oxygenAfterInflow(42, 0)],
  [
    'jacketSkinK of a tube colder than the air',
    () =>
      jacketSkinK({ diameterM: 0.6, tubeK: 280, ambientK: 291 }, { thicknessM: 0.1, conductivityWMK: 0.045 }),
  ],
  ['airForRise', () => airForRise(1000, Number.NaN)],
])('%s refuses what cannot be', (_name, work) => {
  expect(work).toThrow(PhysicsError)
})
