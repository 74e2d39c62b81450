/** Steps, setpoint and permits of a bake plan, by hand arithmetic. */
import { expect, test } from 'vitest'
import {
  type BakePlanContent,
  BakePlanContentSchema,
  permitChainText,
  permitWindows,
  planSteps,
  setpointCurve,
  stepOf,
  wallCurveDown,
} from '#app/domain/bake-plan.ts'

const content: BakePlanContent = {
  segments: ['SG-05'],
  startsAt: null,
  prepHours: 48,
  celsius: 150,
  upKH: 10,
  holdPa: 1e-2,
  abortPa: 1e-1,
  spreadK: 20,
  soakHours: 168,
  soakEnd: { fallPercent: 10, waterBehind: true },
  cooling: { kind: 'natural' },
  pumpChangeC: 80,
  coldC: 40,
  testHours: 48,
  supply: 'HX-1',
  cart: 'MC-A',
  targetPa: 2e-7,
  remarks: '',
}
// Time constant 5 h: specific heat and loss chosen for it. 7930 · 3 mm · 500 / U = 18000 s gives U = 0.6608.
const around = {
  ambientC: 18,
  tube: {
    diameterM: 0.6,
    wallM: 0.003,
    lossWM2K: (7930 * 0.003 * 500) / 18_000,
    ambientK: 291.15,
    specificHeatJKgK: 500,
  },
}

test('the steps follow one another without a gap, preparation before hour 0', () => {
  const steps = planSteps(content, around)
  expect(steps.map(({ kind }) => kind)).toEqual([
    'preparation',
    'ramp',
    'soak',
    'cool-down',
    'post-bake-test',
  ])
  expect(steps[0]).toMatchObject({ fromH: -48, toH: 0 })
  for (const [i, step] of steps.entries()) if (i > 0) expect(step.fromH).toBe(steps[i - 1]?.toH)
  expect(stepOf(steps, 'ramp').toH).toBeCloseTo(13.2)
  expect(stepOf(steps, 'soak').toH).toBeCloseTo(181.2)
})

test('free cooling takes the time of an exponential: tau · ln((150 − 18)/(40 − 18)) = 8.96 h for tau 5 h', () => {
  const steps = planSteps(content, around)
  const cool = stepOf(steps, 'cool-down')
  expect(cool.toH - cool.fromH).toBeCloseTo(5 * Math.log(132 / 22), 3)
})

test('controlled cooling lasts longer than its setpoint where the tube cannot follow it', () => {
  const controlled = { ...content, cooling: { kind: 'controlled' as const, downKH: 10 } }
  const last = wallCurveDown(controlled, around).at(-1)
  // Above 18 + 10 · 5 = 68 °C the setpoint leads, 8.2 h; below, nature: 5 · ln(50/22) = 4.10 h.
  expect(last?.hours).toBeCloseTo(8.2 + 5 * Math.log(50 / 22), 1)
  // The setpoint itself promises 11 h.
  expect(setpointCurve(controlled, around).at(-1)?.hours).toBeCloseTo(181.2 + 11)
})

test('a hold in the ramp moves everything after it', () => {
  const steps = planSteps(content, around, [{ celsius: 90, hours: 6 }])
  expect(stepOf(steps, 'ramp').toH).toBeCloseTo(19.2)
  const curve = setpointCurve(content, around, [{ celsius: 90, hours: 6 }])
  expect(curve.map(({ celsius }) => celsius)).toEqual([18, 90, 90, 150, 150])
  expect(curve[2]?.hours).toBeCloseTo(7.2 + 6)
})

test('a bake that stays hot beyond ten days needs a chain of permits without a gap', () => {
  expect(permitChainText(permitWindows(planSteps(content, around)))).toBeNull()
  const long = planSteps({ ...content, soakHours: 480 }, around)
  const windows = permitWindows(long)
  expect(windows).toHaveLength(3)
  for (const [i, { fromH, toH }] of windows.entries()) {
    expect(toH - fromH).toBeLessThanOrEqual(240)
    if (i > 0) expect(fromH).toBeLessThan(windows[i - 1]?.toH ?? 0)
  }
  expect(windows.at(-1)?.toH).toBe(stepOf(long, 'cool-down').toH)
  expect(permitChainText(windows)).toContain('chain of 3 permits')
})

test.each([
  ['three segments', { segments: ['a', 'b', 'c'] }],
  ['a temperature no tube is baked at', { celsius: 500 }],
  ['a hold at no pressure', { holdPa: 0 }],
  ['no target', { targetPa: 0 }],
])('%s is no plan', (_what, wrong) => {
  expect(BakePlanContentSchema.safeParse({ ...content, ...wrong }).success).toBe(false)
})
