import { describe, expect, it } from 'vitest'
import { printable, runsOf } from '#app/domain/paper/blocks.ts'
import { curvePoints } from '#app/domain/paper/curve.ts'
import { hatch, modulesDrawing, SMALLEST_PT } from '#app/domain/paper/drawing.ts'
import { windowText } from '#app/domain/paper/permit-sheet.ts'
import { closedStretch, sketchDrawing } from '#app/domain/paper/sketch.ts'
import { standingOf } from '#app/domain/paper/standing.ts'
import { type PaperFacts, permitPaper } from '#app/domain/permit-sheets.ts'
import { PERMIT_STATES } from '#app/domain/permit-words.ts'
import { paperFacts } from '#tests/support/paper-facts.ts'

/** Everything that the sheets say, in one text. */
function wordsOf(facts: PaperFacts): string {
  return JSON.stringify(permitPaper(facts))
}

describe('the sheets of a permit', () => {
  it('are six while it is live, in the order of posting', () => {
    const { sheets, frame } = permitPaper(paperFacts())
    expect(sheets.map(({ key }) => key)).toEqual([
      'permit',
      'isolation',
      'sketch',
      'curve',
      'emergency',
      'sign-in',
    ])
    expect(frame.standing).toBeNull()
    expect(frame.standingText).toContain('Live until 2026-11-10 19:40 (UTC+01:00)')
    expect(frame.revisionText).toBe('Revision 5, version 1 (the approved one)')
    expect(frame.printedText).toBe('Printed 2026-11-10 10:00 (UTC+01:00) by Otto Berge')
  })

  it('begin with the large SUSPENDED sheet while work is stopped, and only then', () => {
    const stopped = {
      at: new Date('2026-11-10T08:00:00.000Z'),
      by: 'Carl Ny',
      reason: 'Fan stopped',
      madeSafe: null,
    }
    const { sheets } = permitPaper(paperFacts({ state: 'suspended', stopped }))
    expect(sheets[0]?.key).toBe('suspended')
    expect(JSON.stringify(sheets[0])).toContain('Nobody has recorded that it was made safe.')
    for (const state of PERMIT_STATES) {
      const keys = permitPaper(paperFacts({ state })).sheets.map(({ key }) => key)
      expect(keys.includes('suspended'), state).toBe(state === 'suspended')
    }
  })

  it('say the window with the offset of each end, also over a clock change', () => {
    // Both nights of Europe/Vienna: 2026-10-25 at 03:00 back to 02:00, 2027-03-28 at 02:00 on to 03:00.
    const autumn = paperFacts({
      windowFrom: new Date('2026-10-24T04:00:00.000Z'),
      windowTo: new Date('2026-10-26T05:00:00.000Z'),
    })
    expect(windowText(autumn)).toBe('2026-10-24 06:00 (UTC+02:00) to 2026-10-26 06:00 (UTC+01:00), 49 hours')
    const spring = paperFacts({
      windowFrom: new Date('2027-03-27T05:00:00.000Z'),
      windowTo: new Date('2027-03-29T04:00:00.000Z'),
    })
    expect(windowText(spring)).toBe('2027-03-27 06:00 (UTC+01:00) to 2027-03-29 06:00 (UTC+02:00), 47 hours')
  })

  it('show locks by number, and say in words where none hangs or nobody has verified', () => {
    const words = wordsOf(paperFacts())
    for (const word of [
      'L-201',
      'tag T-201',
      'NOT LOCKED',
      'NOT VERIFIED',
      '20.8 %',
      'OXP-01',
      'calibrated to 2027-03-01',
    ]) {
      expect(words).toContain(word)
    }
  })

  it('leave out sketch and curve while place and heating are not said', () => {
    const { sheets } = permitPaper(paperFacts({ state: 'draft', sketch: null, curve: null }))
    expect(sheets.map(({ key }) => key)).toEqual(['permit', 'isolation', 'emergency', 'sign-in'])
  })

  it('name the emergency numbers and the assembly point on the emergency card', () => {
    const card = permitPaper(paperFacts()).sheets.find(({ key }) => key === 'emergency')
    const words = JSON.stringify(card)
    for (const word of [
      '7-000',
      'Gate west',
      'breathing apparatus',
      'hydrogen fluoride',
      'comes before this card',
    ]) {
      expect(words).toContain(word)
    }
  })
})

describe('the large letters', () => {
  const standing = (changes: Partial<Parameters<typeof standingOf>[0]>) =>
    standingOf({
      state: 'issued',
      version: 1,
      approvedVersion: 1,
      windowFrom: null,
      currentUntil: new Date('2026-11-10T18:00:00.000Z'),
      zone: 'Europe/Vienna',
      ...changes,
    })

  it('are there in every state but live', () => {
    for (const state of PERMIT_STATES) {
      const { large, meaning } = standing({ state })
      expect(large === null, state).toBe(state === 'issued')
      expect(meaning.length, state).toBeGreaterThan(10)
    }
  })

  it('say of a draft and a request that it is not a permit, and of changed terms that the approval is void', () => {
    expect(standing({ state: 'draft', approvedVersion: null }).large).toBe('DRAFT: NOT A PERMIT')
    expect(standing({ state: 'requested', approvedVersion: null }).large).toBe('REQUESTED: NOT A PERMIT')
    const changed = standing({ state: 'requested', version: 2 })
    expect(changed.large).toBe('REQUESTED: APPROVAL VOID')
    expect(changed.meaning).toContain('copies of the earlier one are superseded')
  })
})

describe('drawings', () => {
  it('keep the closed stretch on the line', () => {
    const { sketch } = paperFacts()
    if (sketch === null) throw new Error('no sketch')
    expect(closedStretch(sketch)).toEqual({ fromM: 0, toM: 160 })
    const words = sketchDrawing(sketch).shapes.flatMap((shape) => (shape.kind === 'text' ? [shape.text] : []))
    for (const word of ['West barrier', 'East barrier', '0 m', '160 m', 'SG-T1', 'GV-T1'])
      expect(words).toContain(word)
  })

  it('use no letters below eight points', () => {
    for (const { blocks } of permitPaper(paperFacts()).sheets) {
      for (const block of blocks) {
        if (block.kind !== 'drawing') continue
        for (const shape of block.drawing.shapes) {
          if (shape.kind === 'text') expect(shape.size, shape.text).toBeGreaterThanOrEqual(SMALLEST_PT)
        }
      }
    }
  })

  it('hatch a rectangle from edge to edge and never beyond it', () => {
    const box = { x: 10, y: 20, width: 47, height: 13 }
    for (const lean of [-1, 1] as const) {
      const lines = hatch(box, 5, lean, 1)
      expect(lines.length).toBe(11)
      for (const shape of lines) {
        if (shape.kind !== 'line') throw new Error('a hatch of something else than lines')
        for (const [x, y] of [shape.from, shape.to]) {
          expect(x >= 10 - 1e-9 && x <= 57 + 1e-9 && y >= 20 - 1e-9 && y <= 33 + 1e-9).toBe(true)
        }
        // At 45°: as far down as across.
        expect(Math.abs(shape.to[0] - shape.from[0])).toBeCloseTo(Math.abs(shape.to[1] - shape.from[1]))
      }
    }
  })

  it('ramp at the rate given, then hold, then cool', () => {
    const { curve } = paperFacts()
    if (curve === null) throw new Error('no curve')
    // (150 − 18) °C at 10 °C/h is 13.2 h.
    expect(curvePoints(curve)).toEqual([
      { hours: 0, celsius: 18 },
      { hours: 13.2, celsius: 150 },
      { hours: 73.2, celsius: 150 },
      { hours: 77.2, celsius: 90 },
      { hours: 82.2, celsius: 40 },
    ])
  })

  it('draw the dark modules of a code and nothing else', () => {
    const { shapes } = modulesDrawing(
      [
        [true, true, false],
        [false, true, false],
        [true, false, true],
      ],
      30,
    )
    const boxes = shapes.map((shape) =>
      shape.kind === 'rect' ? [shape.x, shape.y, shape.width, shape.height] : [],
    )
    expect(boxes).toEqual([
      [0, 0, 20, 10],
      [10, 10, 10, 10],
      [0, 20, 10, 10],
      [20, 20, 10, 10],
    ])
  })
})

describe('letters for paper', () => {
  it('set raised and lowered figures as runs of their own', () => {
    expect(runsOf('5×10⁻⁸ of H₂O')).toEqual([
      { text: '5×10', shift: 'none' },
      { text: '−8', shift: 'raised' },
      { text: ' of H', shift: 'none' },
      { text: '2', shift: 'lowered' },
      { text: 'O', shift: 'none' },
    ])
  })

  it('say signs in words that the typeface lacks', () => {
    expect(printable('≥ 3 Ω, ≤40 °C, 1 → 2')).toBe('at least 3 Ω, at most 40 °C, 1 to 2')
  })
})
