/** A11: a thermocouple that is not to be believed. */
import { z } from 'zod'
import { qualityCode, UNTIMED_MARKS } from '../readings.ts'
import type { ThermocoupleFacts } from './facts.ts'
import { type Case, type Change, EVALUABLE, figure, heldAt, type Judge, kept, notEvaluable } from './judge.ts'
import { BACK, BEYOND, Latch, UNKNOWN, type Zone } from './latch.ts'
import { beside } from './machines.ts'
import { bridgeMs, figureText, firstAt, measured, named, silenceText } from './series.ts'

/** Qualities that are a fault of the wire and not of the tube. */
const BROKEN = new Set([qualityCode('fault'), qualityCode('no-signal'), qualityCode('over-range')])
/** So many stretches of time make the window in which it should have moved. */
const SPANS = 6

const SpanSchema = z.object({
  index: z.number(),
  low: z.number(),
  high: z.number(),
  besideLow: z.number(),
  besideHigh: z.number(),
})
const MemorySchema = z.object({
  before: z.object({ at: z.number(), value: z.number(), beside: z.number().nullable() }).nullable(),
  jumpedMs: z.number().nullable(),
  jumpC: z.number(),
  flat: z.boolean(),
  spans: z.array(SpanSchema),
})
type Span = z.infer<typeof SpanSchema>

export function judgeThermocouple(of: Case<ThermocoupleFacts>): Judge {
  const { content, memory } = of
  const { series, neighbours, controls } = of.facts
  const openC = figure(of, 'openC')
  const jumpC = figure(of, 'jumpC')
  const spanMs = (1000 * figure(of, 'flatS')) / SPANS
  const bridge = bridgeMs(series)
  const latch = new Latch(content.onDelayS * 1000, content.offDelayS * 1000, bridge, kept(memory, 'latch'))
  const found = MemorySchema.safeParse(kept(memory, 'wire'))
  const m: z.infer<typeof MemorySchema> = found.success
    ? structuredClone(found.data)
    : { before: null, jumpedMs: null, jumpC: 0, flat: false, spans: [] }
  let ranFromMs = Number.NEGATIVE_INFINITY

  function mind(at: number, value: number, level: number): void {
    const { before } = m
    if (before !== null && at - before.at <= bridge) {
      const step = value - before.value
      const besideStep = before.beside === null || Number.isNaN(level) ? 0 : level - before.beside
      // What its neighbours do as well is no fault of the wire.
      if (Math.abs(step) > jumpC && Math.abs(step - besideStep) > jumpC) {
        m.jumpedMs = at
        m.jumpC = step
      }
    }
    m.before = { at, value, beside: Number.isNaN(level) ? null : level }
    if (!Number.isNaN(level)) widen(Math.floor(at / spanMs), value, level)
  }

  function widen(index: number, value: number, level: number): void {
    const last = m.spans.at(-1)
    if (last?.index === index) {
      last.low = Math.min(last.low, value)
      last.high = Math.max(last.high, value)
      last.besideLow = Math.min(last.besideLow, level)
      last.besideHigh = Math.max(last.besideHigh, level)
      return
    }
    if (last !== undefined) m.flat = isFlat(m.spans, last.index)
    m.spans.push({ index, low: value, high: value, besideLow: level, besideHigh: level })
    if (m.spans.length > SPANS) m.spans.shift()
  }

  function isFlat(spans: readonly Span[], last: number): boolean {
    if (spans.length < SPANS || spans[0]?.index !== last - SPANS + 1) return false
    const own = Math.max(...spans.map(({ high }) => high)) - Math.min(...spans.map(({ low }) => low))
    const others =
      Math.max(...spans.map(({ besideHigh }) => besideHigh)) -
      Math.min(...spans.map(({ besideLow }) => besideLow))
    return own <= figure(of, 'flatC') && others >= figure(of, 'movingC')
  }

  function isOpen(i: number): boolean {
    if (((series.marks[i] as number) & UNTIMED_MARKS) !== 0) return false
    return named(series, i) >= openC || BROKEN.has(series.quality[i] as number)
  }

  function because(i: number, at: number): string {
    if (isOpen(i)) return 'open wire or no signal'
    if (m.flat) return 'flat while its neighbours move'
    if (m.jumpedMs !== null && at - m.jumpedMs < 1000 * figure(of, 'jumpHoldS')) {
      return `jumped by ${figureText(Math.abs(m.jumpC), '°C')}`
    }
    return ''
  }

  return {
    run(fromMs, untilMs) {
      ranFromMs = fromMs
      const changes: Change[] = []
      const levels = neighbours.map(beside)
      const end = firstAt(series.at, untilMs)
      for (let i = firstAt(series.at, fromMs); i < end; i += 1) {
        const at = series.at[i] as number
        const value = measured(series, i)
        if (!Number.isNaN(value)) mind(at, value, meanLevel(levels, at))
        const doubt = because(i, at)
        const zone: Zone = doubt !== '' ? BEYOND : Number.isNaN(value) ? UNKNOWN : BACK
        const turned = latch.step(at, zone)
        if (turned === 0) continue
        const said = named(series, i)
        changes.push({
          part: 'wire',
          on: turned === 1,
          atMs: at,
          sinceMs: latch.since(turned, at),
          priority: heldAt(controls, at) ? 'high' : content.priority,
          value: said,
          limit: null,
          unit: '°C',
          what: `${series.tag} ${turned === 1 ? `in doubt: ${doubt}` : 'reads plausibly again'}`,
          text:
            turned === 1
              ? `${series.tag} is not to be believed: ${doubt}${Number.isNaN(said) ? '' : ` (it says ${figureText(said, '°C')})`}.${heldAt(controls, at) ? ' The heating is controlled or limited by it.' : ''}`
              : `${series.tag} moves with its neighbours again and reads ${figureText(said, '°C')}.`,
        })
      }
      return changes
    },
    verdict(untilMs) {
      const known = latch.knownMs
      if (known === null || untilMs - known > bridge) {
        return notEvaluable(silenceText(series, known, ranFromMs, untilMs))
      }
      return EVALUABLE
    },
    memory: () => ({ latch: latch.memory(), wire: m }),
  }
}

/** Mean of those neighbours that have just been read; NaN when none has. */
function meanLevel(levels: readonly ((ms: number) => number)[], at: number): number {
  let sum = 0
  let count = 0
  for (const level of levels) {
    const value = level(at)
    if (Number.isNaN(value)) continue
    sum += value
    count += 1
  }
  return count === 0 ? Number.NaN : sum / count
}
