import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { clip, nextChange, overlaps, type Span, spanAt, writeOver } from '#app/domain/dated-spans.ts'

interface Named extends Span {
  name: string
}

const at = (hour: number) => new Date(Date.UTC(2026, 9, 20, hour))
const span = (name: string, from: number, to: number | null): Named => ({
  name,
  startsAt: at(from),
  endsAt: to === null ? null : at(to),
})

/** Any row of spans without overlap, perhaps with gaps, perhaps open at its end. */
const history = fc
  .record({
    cuts: fc.uniqueArray(fc.integer({ min: 0, max: 100 }), { minLength: 2, maxLength: 8 }),
    open: fc.boolean(),
    gaps: fc.array(fc.boolean(), { minLength: 8, maxLength: 8 }),
  })
  .map(({ cuts, open, gaps }) => {
    const sorted = cuts.sort((a, b) => a - b)
    const rows: Named[] = []
    for (const [index, from] of sorted.entries()) {
      const to = sorted[index + 1]
      if (to === undefined) {
        if (open) rows.push(span(`r${index}`, from, null))
      } else if (!gaps[index]) rows.push(span(`r${index}`, from, to))
    }
    return rows
  })
const written = fc
  .record({
    from: fc.integer({ min: -5, max: 105 }),
    length: fc.option(fc.integer({ min: 1, max: 60 }), { nil: null }),
  })
  .map(({ from, length }) => span('new', from, length === null ? null : from + length))

describe('writing a stretch over recorded ones', () => {
  it('closes the open row at the instant and keeps what went before', () => {
    const rows = [span('a', 0, null)]
    const { replaced, remnants } = writeOver(rows, span('b', 10, null))
    expect(replaced).toEqual(rows)
    expect(remnants).toEqual([{ of: rows[0], startsAt: at(0), endsAt: at(10) }])
  })

  it('leaves both sides of a row that is written over in its middle', () => {
    const { remnants } = writeOver([span('a', 0, 30)], span('b', 10, 20))
    expect(remnants.map(({ startsAt, endsAt }) => [startsAt, endsAt])).toEqual([
      [at(0), at(10)],
      [at(20), at(30)],
    ])
  })

  it('touches nothing that only meets it end to start', () => {
    const { replaced } = writeOver([span('a', 0, 10), span('c', 20, null)], span('b', 10, 20))
    expect(replaced).toEqual([])
  })

  it('holds the new row inside its stretch and the former belief everywhere else, without overlap', () => {
    fc.assert(
      fc.property(history, written, (rows, fresh) => {
        const { replaced, remnants } = writeOver(rows, fresh)
        const kept: Named[] = rows.filter((row) => !replaced.includes(row))
        const after: Named[] = [
          ...kept,
          ...remnants.map(({ of, startsAt, endsAt }) => ({ name: of.name, startsAt, endsAt })),
          fresh,
        ]
        for (const [index, one] of after.entries()) {
          for (const other of after.slice(index + 1)) expect(overlaps(one, other)).toBe(false)
        }
        for (let hour = -6; hour <= 170; hour += 1) {
          const inside = spanAt([fresh], at(hour)) !== undefined
          expect(spanAt(after, at(hour))?.name).toBe(inside ? 'new' : spanAt(rows, at(hour))?.name)
        }
      }),
    )
  })
})

describe('finding stretches', () => {
  it('gives the next recorded beginning or end', () => {
    const rows = [span('a', 0, 10), span('b', 20, null)]
    expect(nextChange(rows, at(5))).toEqual(at(10))
    expect(nextChange(rows, at(10))).toEqual(at(20))
    expect(nextChange(rows, at(20))).toBeNull()
  })

  it('holds at its start and no longer at its end', () => {
    const rows = [span('a', 0, 10), span('b', 10, null)]
    expect(spanAt(rows, at(0))?.name).toBe('a')
    expect(spanAt(rows, at(10))?.name).toBe('b')
    expect(spanAt(rows, at(-1))).toBeUndefined()
  })

  it('clips rows to a window', () => {
    const rows = [span('a', 0, 10), span('b', 10, null)]
    expect(
      clip(rows, span('w', 5, null)).map(({ of, startsAt, endsAt }) => [of.name, startsAt, endsAt]),
    ).toEqual([
      ['a', at(5), at(10)],
      ['b', at(10), null],
    ])
  })
})
