/** The worker's manners: the newest trial wins, stale ones are given up, and what has no answer is said. */
import { expect, test } from 'vitest'
import { type WhatIfAnswer, type WhatIfAsk, whatIfSolver } from '#app/components/what-if/what-if-solver.ts'
import { usualState } from '#app/domain/what-if.ts'
import { bakedGround, wetGround } from '#tests/fixtures/what-if-grounds.ts'

const usual = usualState(wetGround)

function ask(id: number, numbers: Partial<typeof usual.numbers> = {}): WhatIfAsk {
  return { id, ground: wetGround, state: { ...usual, numbers: { ...usual.numbers, ...numbers } } }
}

/** A solver whose every look at the clock costs a slice, and whose breaths are handed to the test. */
function rig(onBreath: (count: number) => void = () => undefined) {
  const answers: WhatIfAnswer[] = []
  let time = 0
  let breaths = 0
  const take = whatIfSolver({
    post: (answer) => answers.push(answer),
    breathe: async () => {
      breaths += 1
      onBreath(breaths)
    },
    clock: () => {
      time += 10
      return time
    },
  })
  const told = () =>
    answers.map((answer) => `${answer.id} ${answer.kind === 'curve' ? answer.grade : 'refused'}`)
  return { take, told, answers, breaths: () => breaths }
}

test('one trial is answered coarse, then at rest', async () => {
  const { take, told, answers, breaths } = rig()
  await take(ask(1))
  expect(told()).toEqual(['1 moving', '1 at-rest'])
  expect(answers.every((answer) => answer.kind === 'curve' && answer.ms > 0)).toBe(true)
  // Between its slices it listened.
  expect(breaths()).toBeGreaterThan(5)
})

test('a newer trial stops the curve at rest of the older, and of several waiting only the last is answered', async () => {
  const { take, told } = rig((breath) => {
    // The first breath follows the coarse curve; the fourth falls into the one at rest.
    if (breath === 4) for (const id of [2, 3, 4]) void take(ask(id, { speed: 0.1 * id }))
  })
  await take(ask(1))
  expect(told()).toEqual(['1 moving', '4 moving', '4 at-rest'])
})

test('while the hand moves without pause, coarse curves go on coming', async () => {
  let next = 1
  const { take, told } = rig(() => {
    next += 1
    if (next <= 5) void take(ask(next, { speed: 0.1 * next }))
  })
  await take(ask(1))
  expect(told()).toEqual(['1 moving', '2 moving', '3 moving', '4 moving', '5 moving', '5 at-rest'])
})

test('what cannot be solved is said in a sentence, and the next trial is answered', async () => {
  const { take, told, answers } = rig()
  const wet = { ...usualState(bakedGround), wall: 'wet' as const }
  await take({ id: 1, ground: bakedGround, state: wet })
  await take({ ...ask(2), state: { ...usual, numbers: { ...usual.numbers, at: 500 } } })
  await take(ask(3))
  expect(told()).toEqual(['1 refused', '2 refused', '3 moving', '3 at-rest'])
  expect(answers[0]).toMatchObject({ message: expect.stringContaining('speed for water') })
  expect(answers[1]).toMatchObject({ message: expect.stringMatching(/no solution: .*500/) })
})

test('a fault of the program is not taken for a refusal', async () => {
  const { take, told } = rig()
  await expect(take({ id: 1, ground: wetGround, state: null as never })).rejects.toThrow(TypeError)
  await take(ask(2))
  expect(told()).toEqual(['2 moving', '2 at-rest'])
})
