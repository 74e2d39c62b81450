/** A6 and A7: readings and files that did not come. */
import { TZDate } from '@date-fns/tz'
import { z } from 'zod'
import type { AlertPriority } from '../alert-words.ts'
import type { FileFacts, NoDataFacts, Stretch } from './facts.ts'
import { type Case, type Change, EVALUABLE, figure, heldAt, type Judge, kept, notEvaluable } from './judge.ts'
import { figureText, firstAt, measured, utcText } from './series.ts'

const SilenceSchema = z.object({
  /** From where silence counts: the newest good reading, the first look, or the end of time declared off. */
  lastMs: z.number(),
  /** Newest good reading. */
  heardMs: z.number().nullable(),
  on: z.boolean(),
  /** Good readings in a row since it turned on. */
  good: z.number(),
  firstGoodMs: z.number().nullable(),
  high: z.boolean(),
})

/** First instant at or after `fromMs` at which one of the stretches holds; infinite when none will. */
function firstHeld(stretches: readonly Stretch[], fromMs: number): number {
  return stretches.reduce(
    (first, { fromMs: begins, toMs }) =>
      toMs !== null && toMs <= fromMs ? first : Math.min(first, Math.max(begins, fromMs)),
    Number.POSITIVE_INFINITY,
  )
}

/**
 * A6. A live source is silent by the clock; one that delivers files is silent where a channel stops inside a file that
 * goes on. Off time that was declared does not count.
 */
export function judgeNoData(of: Case<NoDataFacts>): Judge {
  const { facts, content, memory } = of
  const { series, live, fileEndMs, off, heated } = facts
  const limitMs = 1000 * (figure(of, 'periods') * series.periodS + figure(of, 'extraS'))
  const clearSamples = figure(of, 'clearSamples')
  const found = SilenceSchema.safeParse(kept(memory, 'silence'))
  let m: z.infer<typeof SilenceSchema> | null = found.success ? { ...found.data } : null
  const offs = off.filter(({ toMs }) => toMs !== null).sort((a, b) => a.fromMs - b.fromMs)

  /** When silence since the last reading becomes too long: time declared off does not count. */
  function tooLongAt(lastMs: number): number {
    let at = lastMs
    for (const { fromMs, toMs } of offs) {
      if (toMs !== null && fromMs <= at + limitMs && toMs > at) at = toMs
    }
    const openOff = off.find((one) => one.toMs === null && one.fromMs <= at + limitMs)
    return openOff === undefined ? at + limitMs : Number.POSITIVE_INFINITY
  }

  function change(on: boolean, atMs: number, sinceMs: number, priority: AlertPriority): Change {
    const minutes = Math.floor((atMs - sinceMs) / 60_000)
    const heardMs = m?.heardMs ?? null
    const last = heardMs === null ? 'no good reading yet' : `last good reading ${utcText(heardMs)}`
    return {
      part: 'silence',
      on,
      atMs,
      sinceMs,
      priority,
      value: on ? minutes : 0,
      limit: limitMs / 60_000,
      unit: 'min',
      what: on
        ? `${series.tag} no data for ${minutes} min (limit ${figureText(limitMs / 60_000, 'min')})`
        : `${series.tag} delivers data again`,
      text: on
        ? `${series.tag}: ${last}.${priority === 'high' ? ' A segment that it watches is heated.' : ''}`
        : `${series.tag} has given ${clearSamples} good readings in a row.`,
    }
  }

  /** Raises, and grows to high with the heat, as far as `untilMs`. */
  function listen(fromMs: number, untilMs: number, changes: Change[]): void {
    if (m === null) return
    const due = tooLongAt(m.lastMs)
    if (!m.on && due < untilMs) {
      const at = Math.max(due, fromMs)
      m.on = true
      m.good = 0
      m.high = heldAt(heated, at)
      changes.push(change(true, at, m.lastMs, m.high ? 'high' : content.priority))
    }
    const offMs = m.on ? firstHeld(off, Math.max(fromMs, Math.min(due, untilMs))) : Number.POSITIVE_INFINITY
    if (m.on && !m.high) {
      const hot = firstHeld(heated, Math.max(fromMs, Math.min(due, untilMs)))
      if (hot < untilMs && hot < offMs) {
        m.high = true
        changes.push(change(true, hot, m.lastMs, 'high'))
      }
    }
    if (m.on && offMs < untilMs) {
      changes.push({
        ...change(false, offMs, offMs, m.high ? 'high' : content.priority),
        what: `${series.tag} declared off`,
        text: `${series.tag} has been declared off, so its silence is not told.`,
      })
      m = { ...m, lastMs: offMs, on: false, high: false, good: 0 }
    }
  }

  return {
    run(fromMs, untilMs) {
      const changes: Change[] = []
      m ??= { lastMs: fromMs, heardMs: null, on: false, good: 0, firstGoodMs: null, high: false }
      const end = firstAt(series.at, untilMs)
      let walked = fromMs
      for (let i = firstAt(series.at, fromMs); i < end; i += 1) {
        if (Number.isNaN(measured(series, i))) continue
        const at = series.at[i] as number
        const inRow = at <= tooLongAt(m.lastMs)
        listen(walked, at, changes)
        walked = at
        if (m.on) {
          // The first reading after the silence begins the row, whatever was before.
          m.good = inRow || m.good === 0 ? m.good + 1 : 1
          if (m.good === 1) m.firstGoodMs = at
          if (m.good >= clearSamples) {
            changes.push(change(false, at, m.firstGoodMs ?? at, m.high ? 'high' : content.priority))
            m.on = false
            m.high = false
            m.good = 0
          }
        }
        m.lastMs = at
        m.heardMs = at
      }
      const listenUntil = live ? untilMs : Math.min(untilMs, fileEndMs ?? Number.NEGATIVE_INFINITY)
      if (listenUntil > walked) listen(walked, listenUntil, changes)
      return changes
    },
    verdict(untilMs) {
      const declared = off.find((one) => one.fromMs <= untilMs && (one.toMs === null || one.toMs > untilMs))
      if (declared !== undefined)
        return notEvaluable(`${series.tag}: declared off since ${utcText(declared.fromMs)}.`)
      if (!live && fileEndMs === null) return notEvaluable(`${series.tag}: its source has delivered no file.`)
      return EVALUABLE
    },
    memory: () => ({ silence: m }),
  }
}

const NIGHT_ENDS_HOUR = 6
/** The last row of a night may stand this far before 06:00 and still be the whole night, as in domain/expected-files.ts. */
const TOLERANCE_MS = 30 * 60_000

const FilesSchema = z.object({
  missing: z.array(
    z.object({
      night: z.string(),
      dueMs: z.number(),
      endMs: z.number(),
      worsenMs: z.number(),
      worse: z.boolean(),
    }),
  ),
})
type Missing = z.infer<typeof FilesSchema>['missing'][number]

function siteTime(day: TZDate, hour: number, minute: number, zone: string): number {
  return new TZDate(day.getFullYear(), day.getMonth(), day.getDate(), hour, minute, 0, zone).getTime()
}

/** Nights whose file is due in a window, by the site's own days: a day of 23 or 25 hours is one day. */
function nightsDue(zone: string, dueMinute: number, worsenMinute: number, fromMs: number, untilMs: number) {
  const nights: Omit<Missing, 'worse'>[] = []
  const day = new TZDate(fromMs, zone)
  day.setHours(12, 0, 0, 0)
  for (;;) {
    const dueMs = siteTime(day, Math.floor(dueMinute / 60), dueMinute % 60, zone)
    if (dueMs >= untilMs) return nights
    const before = new TZDate(day.getTime(), zone)
    before.setDate(before.getDate() - 1)
    const night = `${before.getFullYear()}-${String(before.getMonth() + 1).padStart(2, '0')}-${String(before.getDate()).padStart(2, '0')}`
    if (dueMs >= fromMs) {
      nights.push({
        night,
        dueMs,
        endMs: siteTime(day, NIGHT_ENDS_HOUR, 0, zone),
        worsenMs: siteTime(day, Math.floor(worsenMinute / 60), worsenMinute % 60, zone),
      })
    }
    day.setDate(day.getDate() + 1)
  }
}

/** A7. One alert a source, however many nights are missing; it ends when none is, or the last one is given up. */
export function judgeFiles(of: Case<FileFacts>): Judge {
  const { facts, subject, content, memory } = of
  const { zone, off } = facts
  const found = FilesSchema.safeParse(memory)
  let missing: Missing[] = found.success ? found.data.missing.map((one) => ({ ...one })) : []
  const accepted = [...facts.accepted].sort((a, b) => a.acceptedMs - b.acceptedMs)
  const lookBackMs = 86_400_000 * figure(of, 'lookBackDays')
  const worse: AlertPriority = 'medium'

  /** When a night's file was accepted; infinite when it was not. */
  function acceptedAt(endMs: number): number {
    return (
      accepted.find(
        (file) => file.endMs >= endMs - TOLERANCE_MS && file.endMs < endMs + 86_400_000 - TOLERANCE_MS,
      )?.acceptedMs ?? Number.POSITIVE_INFINITY
    )
  }

  function change(
    on: boolean,
    night: string,
    atMs: number,
    sinceMs: number,
    priority: AlertPriority,
  ): Change {
    return {
      part: night,
      on,
      atMs,
      sinceMs,
      priority,
      value: missing.length,
      limit: 0,
      unit: '',
      what: on
        ? `${subject.tag} night file of ${night} missing`
        : `${subject.tag} night file of ${night} settled`,
      text: on
        ? `The file of the night of ${night} from ${subject.tag} has not been accepted. Nights missing: ${missing.map((one) => one.night).join(', ')}.`
        : `The file of the night of ${night} from ${subject.tag} has been accepted, or is not waited for any longer.`,
    }
  }

  return {
    run(fromMs, untilMs) {
      const changes: Change[] = []
      const due = nightsDue(zone, figure(of, 'dueMinute'), figure(of, 'worsenMinute'), fromMs, untilMs)
      for (const { night, dueMs, endMs, worsenMs } of due) {
        if (heldAt(off, dueMs) || acceptedAt(endMs) <= dueMs) continue
        missing.push({ night, dueMs, endMs, worsenMs, worse: false })
        changes.push(change(true, night, dueMs, dueMs, content.priority))
      }
      for (const one of missing) {
        const excusedMs = heldAt(off, one.dueMs) ? fromMs : Number.POSITIVE_INFINITY
        const settled = Math.min(acceptedAt(one.endMs), excusedMs, one.endMs + lookBackMs)
        if (!one.worse && one.worsenMs < untilMs && settled > one.worsenMs && worse !== content.priority) {
          one.worse = true
          changes.push(change(true, one.night, Math.max(one.worsenMs, fromMs), one.worsenMs, worse))
        }
        if (settled < untilMs) {
          const at = Math.max(settled, fromMs)
          changes.push(change(false, one.night, at, at, one.worse ? worse : content.priority))
        }
      }
      const open = new Set(missing.map(({ night }) => night))
      for (const { part, on } of changes) if (!on) open.delete(part)
      missing = missing.filter(({ night }) => open.has(night))
      return changes
    },
    verdict: () => EVALUABLE,
    memory: () => ({ missing }),
  }
}
