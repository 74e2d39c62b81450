/** A10: how far the temperatures along a tube lie apart. */
import { z } from 'zod'
import type { SpreadFacts } from './facts.ts'
import { type Case, type Change, EVALUABLE, figure, type Judge, kept, notEvaluable } from './judge.ts'
import { BACK, BETWEEN, BEYOND, Latch, UNKNOWN, type Zone } from './latch.ts'
import { bridgeMs, figureText, measured, silenceText } from './series.ts'
import { walkTogether } from './together.ts'

const NewestSchema = z.array(z.object({ tag: z.string(), value: z.number(), at: z.number() }))

interface Apart {
  /** °C above the limit; below zero is within. */
  excess: number
  value: number
  limit: number
  high: number
  low: number
}

/**
 * The larger of the two excesses over the limits, from the thermocouples that have just been read. Those that are
 * missing could only widen it: being beyond needs two of them, being back needs the share that the rule asks for.
 */
export function judgeSpread(of: Case<SpreadFacts>): Judge {
  const { content, memory } = of
  const { thermocouples, states } = of.facts
  const deadband = figure(of, 'deadbandC')
  const rampMs = 1000 * figure(of, 'rampS')
  const ramps = states.filter(({ state }) => state === 'heating').map(({ fromMs }) => fromMs)
  const count = thermocouples.length
  const bridge = Math.max(...thermocouples.map(bridgeMs), 0)
  const latch = new Latch(content.onDelayS * 1000, content.offDelayS * 1000, bridge, kept(memory, 'latch'))
  const values = new Float64Array(count).fill(Number.NaN)
  const times = new Float64Array(count).fill(Number.NEGATIVE_INFINITY)
  for (const { tag, value, at } of NewestSchema.safeParse(kept(memory, 'newest')).data ?? []) {
    const k = thermocouples.findIndex((one) => one.tag === tag)
    if (k < 0) continue
    values[k] = value
    times[k] = at
  }
  const apart: Apart = { excess: 0, value: 0, limit: 0, high: 0, low: 0 }
  let ranFromMs = Number.NEGATIVE_INFINITY

  function fresh(k: number, at: number): boolean {
    return at - (times[k] as number) <= 3000 * (thermocouples[k]?.periodS ?? 0)
  }

  function consider(value: number, limit: number, high: number, low: number): void {
    if (value - limit <= apart.excess) return
    apart.excess = value - limit
    apart.value = value
    apart.limit = limit
    apart.high = high
    apart.low = low
  }

  /** Fills `apart`; gives how many have just been read. */
  function look(at: number): number {
    const ramping = ramps.some((fromMs) => fromMs <= at && at < fromMs + rampMs)
    const neighbourLimit = figure(of, ramping ? 'rampNeighbourC' : 'neighbourC')
    apart.excess = Number.NEGATIVE_INFINITY
    let high = -1
    let low = -1
    let seen = 0
    for (let k = 0; k < count; k += 1) {
      if (!fresh(k, at)) continue
      seen += 1
      const value = values[k] as number
      if (high < 0 || value > (values[high] as number)) high = k
      if (low < 0 || value < (values[low] as number)) low = k
      // Only true neighbours: over a missing one the distance is larger and so may the difference be.
      if (k > 0 && fresh(k - 1, at)) {
        const before = values[k - 1] as number
        if (value > before) consider(value - before, neighbourLimit, k, k - 1)
        else consider(before - value, neighbourLimit, k - 1, k)
      }
    }
    if (high < 0 || low < 0) return seen
    const all = (values[high] as number) - (values[low] as number)
    const limit = figure(of, ramping ? 'rampSpreadC' : 'spreadC')
    // The whole tube is what is told where both are beyond.
    if (all > limit) apart.excess = Number.NEGATIVE_INFINITY
    consider(all, limit, high, low)
    return seen
  }

  function zoneOf(seen: number): Zone {
    if (seen >= 2 && apart.excess > 0) return BEYOND
    if (count < 2 || seen < 2 || seen < content.coverage * count) return UNKNOWN
    return apart.excess < -deadband ? BACK : BETWEEN
  }

  function describe(): Pick<Change, 'value' | 'limit' | 'unit' | 'what' | 'text' | 'more'> {
    const name = (k: number) =>
      `${thermocouples[k]?.tag ?? '?'} (${figureText(values[k] ?? Number.NaN, '°C')})`
    const neighbours =
      apart.limit === figure(of, 'neighbourC') || apart.limit === figure(of, 'rampNeighbourC')
    return {
      value: apart.value,
      limit: apart.limit,
      unit: '°C',
      what: `${neighbours ? 'neighbours apart by' : 'spread'} ${figureText(apart.value, '°C')} (limit ${figureText(apart.limit, '')})`,
      text: `${figureText(apart.value, '°C')} between ${name(apart.high)} and ${name(apart.low)}, limit ${figureText(apart.limit, '°C')}${neighbours ? ' between neighbours' : ''}.`,
      more: { high: thermocouples[apart.high]?.tag, low: thermocouples[apart.low]?.tag },
    }
  }

  return {
    run(fromMs, untilMs) {
      ranFromMs = fromMs
      const changes: Change[] = []
      walkTogether(
        thermocouples,
        fromMs,
        untilMs,
        (k, i, at) => {
          const value = measured(thermocouples[k]!, i)
          if (Number.isNaN(value)) return
          values[k] = value
          times[k] = at
        },
        (at) => {
          const turned = latch.step(at, zoneOf(look(at)), apart.value)
          if (turned === 0) return
          changes.push({
            part: 'spread',
            on: turned === 1,
            atMs: at,
            sinceMs: latch.since(turned, at),
            priority: content.priority,
            ...describe(),
          })
        },
      )
      return changes
    },
    verdict(untilMs) {
      const first = thermocouples[0]
      if (first === undefined || count < 2)
        return notEvaluable('The segment has fewer than two thermocouples.')
      const known = latch.knownMs
      if (known !== null && untilMs - known <= bridge) return EVALUABLE
      const silent = thermocouples.find((_, k) => !fresh(k, untilMs)) ?? first
      return notEvaluable(
        `Fewer than ${Math.round(100 * content.coverage)} % of ${count} thermocouples are good. ${silenceText(silent, known, ranFromMs, untilMs)}`,
      )
    },
    memory: () => ({
      latch: latch.memory(),
      newest: thermocouples.flatMap(({ tag }, k) =>
        Number.isNaN(values[k]) ? [] : [{ tag, value: values[k], at: times[k] }],
      ),
    }),
  }
}
