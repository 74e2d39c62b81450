import { describe, expect, it } from 'vitest'
import { beginInFineBins } from '#app/domain/crossed-begin.ts'
import { judgePair, type PairInput, type PairJudgement } from '#app/domain/crossed-channels.ts'
import type { KnownEvent } from '#app/domain/crossed-events.ts'
import { correlation, fullCountsOf, lnSeries, together } from '#app/domain/crossed-series.ts'
import { beginWords, evidenceOf } from '#app/domain/crossed-words.ts'

const BIN_MS = 7_200_000
const FROM_MS = Date.UTC(2026, 5, 1)
const BINS = 20 * 12

/** Numbers that look random and are the same at every run: mean 0, deviation about 1. */
function noise(seed: number): () => number {
  let state = seed >>> 0
  const next = () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0
    return state / 4_294_967_296
  }
  return () => (next() + next() + next() + next() - 2) * Math.sqrt(3)
}

interface Scene {
  /** ln p of the gas of both segments by bin, without the gauges' own levels. */
  gas?: (bin: number) => [number, number]
  /** ln levels of the tested gauges against the other gauge of their segment. */
  levels?: [number, number]
  /** Bin from which the two channels carry each other's gauge. */
  crossedFrom?: number
  /** What is added to a channel in a bin, ln; NaN takes the bin away. */
  spoilX?: (bin: number) => number
  spoilY?: (bin: number) => number
  events?: KnownEvent[]
  scatter?: number
}

/** Two segments of three gauges, with one tested channel each. */
function scene({
  gas = () => [0, 0.05],
  levels = [-0.2, 0.15],
  crossedFrom = Number.POSITIVE_INFINITY,
  spoilX = () => 0,
  spoilY = () => 0,
  events = [],
  scatter = 0.015,
}: Scene): PairInput {
  const bins = Array.from({ length: BINS }, (_, bin) => bin)
  const gauge = (tag: string, seed: number, ln: (bin: number) => number) => {
    const random = noise(seed)
    return { tag, ln: bins.map((bin) => Math.log(5e-8) + ln(bin) + scatter * random()) }
  }
  const of = (side: 0 | 1) => (bin: number) => gas(bin)[side] + levels[side]
  const wired = (side: 0 | 1) => (bin: number) => of(bin >= crossedFrom ? ((1 - side) as 0 | 1) : side)(bin)
  return {
    x: {
      ...gauge('HC-31B', 1, (bin) => wired(0)(bin) + spoilX(bin)),
      segment: 'SG-31',
      others: [gauge('HC-31A', 2, (bin) => gas(bin)[0]), gauge('CC-31', 3, (bin) => gas(bin)[0] + 0.1)],
    },
    y: {
      ...gauge('HC-32A', 4, (bin) => wired(1)(bin) + spoilY(bin)),
      segment: 'SG-32',
      others: [gauge('HC-32B', 5, (bin) => gas(bin)[1]), gauge('CC-32', 6, (bin) => gas(bin)[1] + 0.1)],
    },
    fromMs: FROM_MS,
    binMs: BIN_MS,
    events,
  }
}

const at = (bin: number) => FROM_MS + bin * BIN_MS

function suspected(judgement: PairJudgement) {
  if (judgement.kind !== 'suspected')
    throw new Error(`expected a suspicion, found ${JSON.stringify(judgement)}`)
  return judgement
}

describe('two channels that carry each other’s gauge', () => {
  it('are found by levels that change places in one moment, to the bin', () => {
    const { begin, confidence, by, departures } = suspected(judgePair(scene({ crossedFrom: 121 })))
    expect(by).toBe('levels')
    expect(begin).toEqual({ afterMs: at(120), byMs: at(121) })
    expect(confidence).toBe('strong')
    // Gas 0.05 and levels 0.35 apart: the one rises by 0.4, the other falls by as much.
    expect(departures.xStraight).toBeCloseTo(0.4, 1)
    expect(departures.yStraight).toBeCloseTo(0.4, 1)
    expect(departures.xCrossed).toBeLessThan(0.03)
    expect(departures.yCrossed).toBeLessThan(0.03)
  })

  it('are found at every begin that leaves enough before and behind it', () => {
    for (let crossedFrom = 40; crossedFrom <= BINS - 14; crossedFrom += 11) {
      const { begin } = suspected(judgePair(scene({ crossedFrom })))
      expect(Math.abs(begin.byMs - at(crossedFrom))).toBeLessThanOrEqual(BIN_MS)
    }
  })

  it('are found by what moves, when they have been crossed since before the data', () => {
    // Only the first segment breathes; like levels, so that nothing else could tell.
    const judgement = suspected(
      judgePair(scene({ gas: (bin) => [0.4 * Math.sin(bin / 9), 0], levels: [0, 0], crossedFrom: 0 })),
    )
    expect(judgement.by).toBe('movements')
    expect(judgement.begin.afterMs).toBeNull()
    expect(judgement.correlations.yNeighbour).toBeGreaterThan(0.95)
    expect(Math.abs(judgement.correlations.xOwn)).toBeLessThan(0.3)
  })

  it('are found by one short event in quiet segments of like level', () => {
    const shut: KnownEvent = { atMs: at(150) + 60_000, segment: 'SG-31', kind: 'state', text: 'port shut' }
    const rises = (bin: number): [number, number] => [bin > 150 && bin < 154 ? 1.5 : 0, 0]
    const judgement = suspected(
      judgePair(scene({ gas: rises, levels: [0, 0], crossedFrom: 0, events: [shut] })),
    )
    expect(judgement.by).toBe('events')
    expect(judgement.begin).toEqual({ afterMs: null, byMs: shut.atMs })
    expect(judgement.events.map(({ verdict }) => verdict)).toEqual(['crossed'])
    expect(judgement.events[0]?.steps.y).toBeCloseTo(Math.exp(1.5), 0)
    expect(judgement.events[0]?.steps.x).toBeCloseTo(1, 1)
  })

  it('are found with gaps in them, and the begin lies in the gap when it fell into one', () => {
    const gap = (bin: number) => (bin >= 110 && bin < 125 ? Number.NaN : bin % 7 === 0 ? Number.NaN : 0)
    const { begin } = suspected(judgePair(scene({ crossedFrom: 118, spoilX: gap })))
    expect(begin).toEqual({ afterMs: at(109), byMs: at(125) })
  })
})

describe('no suspicion', () => {
  it('where the cables are as labelled', () => {
    expect(judgePair(scene({})).kind).toBe('clear')
    expect(judgePair(scene({ gas: (bin) => [Math.sin(bin / 9), Math.cos(bin / 13)] })).kind).toBe('clear')
  })

  it('where one gauge alone steps, even onto the level of the other', () => {
    expect(judgePair(scene({ spoilX: (bin) => (bin >= 120 ? 0.4 : 0) })).kind).toBe('clear')
    expect(judgePair(scene({ spoilY: (bin) => (bin >= 120 ? -0.4 : 0) })).kind).toBe('clear')
  })

  it('where a gauge drifts', () => {
    expect(judgePair(scene({ spoilX: (bin) => -bin / BINS })).kind).toBe('clear')
  })

  it('where both segments go through a bake of four decades one after the other', () => {
    const baked = (bin: number): [number, number] => [
      bin > 60 && bin < 120 ? 9 : 0,
      bin > 130 && bin < 190 ? 9 : 0,
    ]
    expect(judgePair(scene({ gas: baked })).kind).toBe('clear')
  })

  it('where an event after the step shows both channels at home', () => {
    const events: KnownEvent[] = [{ atMs: at(200), segment: 'SG-31', kind: 'pump', text: 'pump off' }]
    // The steps of an exchange, made by two faults; but the rise at the event comes in the channel it should come in.
    const gas = (bin: number): [number, number] => [bin > 200 && bin < 206 ? 1 : 0, 0]
    const input = scene({
      gas,
      events,
      spoilX: (bin) => (bin >= 120 ? 0.35 : 0),
      spoilY: (bin) => (bin >= 120 ? -0.35 : 0),
    })
    expect(judgePair(input).kind).toBe('clear')
    expect(judgePair({ ...input, events: [] }).kind).toBe('suspected')
  })
})

describe('no answer', () => {
  it('where the two read alike and nothing happened', () => {
    const judgement = judgePair(scene({ levels: [0, 0], gas: () => [0, 0] }))
    expect(judgement).toMatchObject({ kind: 'not-evaluable' })
    expect(judgement.kind === 'not-evaluable' && judgement.reason).toMatch(
      /HC-31B and HC-32A would read alike/,
    )
  })

  it('where a segment has no other gauge', () => {
    const input = scene({})
    const judgement = judgePair({ ...input, y: { ...input.y, others: [] } })
    expect(judgement).toEqual({
      kind: 'not-evaluable',
      reason: 'SG-32 has no other gauge to compare HC-32A with',
    })
  })

  it('where a channel is silent most of the time, and it says which', () => {
    const judgement = judgePair(scene({ spoilY: (bin) => (bin < 200 ? Number.NaN : 0) }))
    expect(judgement.kind === 'not-evaluable' && judgement.reason).toMatch(/^only 40 .* from HC-32A$/)
  })
})

describe('a gauge exchanged at the very time', () => {
  it('leaves the suspicion, but not as a strong one', () => {
    const events: KnownEvent[] = [
      { atMs: at(121), segment: 'SG-31', kind: 'gauge-exchange', text: 'HC-31B exchanged' },
    ]
    expect(suspected(judgePair(scene({ crossedFrom: 121, events }))).confidence).toBe('moderate')
  })
})

describe('the begin in finer bins', () => {
  it('is found where the coarse one only bounded it', () => {
    const fine = { ...scene({ crossedFrom: 70 }), fromMs: at(118), binMs: 600_000 }
    expect(beginInFineBins(fine)).toEqual({
      afterMs: at(118) + 69 * 600_000,
      byMs: at(118) + 70 * 600_000,
    })
  })

  it('is not made up from a handful of bins', () => {
    const fine = scene({ crossedFrom: 5, spoilX: (bin) => (bin < 10 ? 0 : Number.NaN) })
    expect(beginInFineBins(fine)).toBeNull()
  })
})

describe('series', () => {
  const grid = { fromMs: FROM_MS, binMs: BIN_MS, length: 4 }

  it('leaves out bins of which most readings were censored, and gaps', () => {
    const full = fullCountsOf(
      [
        { atMs: at(0), mean: 1e-8, count: 12 },
        { atMs: at(1), mean: 1e-8, count: 120 },
        { atMs: at(2), mean: 1e-8, count: 120 },
      ],
      grid,
    )
    expect(full).toEqual([12, 120, 120, 0])
    const ln = lnSeries(
      [
        { atMs: at(0), mean: 1e-8, count: 12 },
        // The few that were not over range: they say 9e-3, the gas was higher.
        { atMs: at(1), mean: 9e-3, count: 30 },
        { atMs: at(2), mean: 2e-8, count: 70 },
      ],
      grid,
      full,
    )
    expect(ln).toEqual([Math.log(1e-8), Number.NaN, Math.log(2e-8), Number.NaN])
  })

  it('makes no step where one gauge of several is off', () => {
    const all = together([
      { tag: 'a', ln: [1, 1, 1, 1, 1] },
      { tag: 'b', ln: [3, 3, Number.NaN, Number.NaN, 3] },
    ])
    for (const one of all) expect(one).toBeCloseTo(1, 12)
  })

  it('correlates only what both have', () => {
    expect(correlation([1, 2, Number.NaN, 4, 5], [2, 4, 9, 8, 10])).toBeCloseTo(1, 12)
    expect(correlation([1, 2], [1, 2])).toBeNaN()
  })
})

describe('the evidence in words', () => {
  const names = { x: { tag: 'HC-31B', segment: 'SG-31' }, y: { tag: 'HC-32A', segment: 'SG-32' } }
  const written = (ms: number) => `bin ${Math.round((ms - FROM_MS) / BIN_MS)}`

  it('names both departures, what is left, and that quiet correlations tell nothing', () => {
    const suspicion = suspected(judgePair(scene({ crossedFrom: 121 })))
    const [levels, events, correlations] = evidenceOf(suspicion, names, written)
    expect(levels).toMatch(
      /HC-31B left its place among the gauges of SG-31 by (4\d|5\d) % .* both fit to [1-3] %/,
    )
    expect(events).toMatch(/^No known event/)
    expect(correlations).toMatch(/too much alike/)
    expect(beginWords(suspicion, written)).toBe('since between bin 120 and bin 121')
  })

  it('tells what each side did at an event', () => {
    const event: KnownEvent = { atMs: at(150), segment: 'SG-31', kind: 'state', text: 'port shut' }
    const gas = (bin: number): [number, number] => [bin > 150 && bin < 154 ? 1.5 : 0, 0]
    const suspicion = suspected(
      judgePair(scene({ gas, levels: [0, 0], crossedFrom: 0, events: [event], scatter: 0.001 })),
    )
    const words = evidenceOf(suspicion, names, written)
    expect(words[0]).toMatch(
      /^bin 150, port shut: the other gauges of SG-31 went to 4\.4\d times, those of SG-32 to 1\.00 times, HC-31B to 1\.00 times, HC-32A to 4\.4\d times; each channel did what the other segment did\.$/,
    )
    expect(words.at(-1)).toMatch(/what moves follows the neighbour/)
    expect(beginWords(suspicion, written)).toBe('at bin 150 already, perhaps for longer')
  })
})
