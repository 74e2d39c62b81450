/** A16, A18, A19, A20 and A22: things that hold from one instant to another, each by itself a reason. */
import { z } from 'zod'
import { ALERT_PRIORITIES, type AlertPriority } from '../alert-words.ts'
import type { EntryFacts, GaugeHealthFacts, MailFacts, PermitFacts, PowerFacts, Standing } from './facts.ts'
import { type Case, type Change, EVALUABLE, figure, type Judge, kept, notEvaluable } from './judge.ts'
import { figureText, utcText } from './series.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS

interface Reason extends Standing {
  priority: AlertPriority
  /** In a whole sentence. */
  text: string
}

const MemorySchema = z.array(
  z.object({ key: z.string(), what: z.string(), priority: z.enum(ALERT_PRIORITIES) }),
)

/** Turns stretches into changes. One that is learned late is told when it is learned; one that is gone has ended. */
function judgeReasons(of: Pick<Case<unknown>, 'content' | 'memory'>, reasons: readonly Reason[]): Judge {
  const onMs = 1000 * of.content.onDelayS
  const offMs = 1000 * of.content.offDelayS
  const found = MemorySchema.safeParse(kept(of.memory, 'open'))
  const open = new Map((found.success ? found.data : []).map((one) => [one.key, one]))

  function change(
    on: boolean,
    atMs: number,
    sinceMs: number,
    reason: Omit<Reason, 'fromMs' | 'toMs'>,
  ): Change {
    return {
      part: reason.key,
      on,
      atMs,
      sinceMs,
      priority: reason.priority,
      value: reason.value ?? null,
      limit: reason.limit ?? null,
      unit: reason.unit ?? '',
      what: on ? reason.what : `over: ${reason.what}`,
      text: on ? reason.text : `Over: ${reason.text}`,
    }
  }

  return {
    run(fromMs, untilMs) {
      const changes: Change[] = []
      for (const reason of reasons) {
        const { key, what, priority, fromMs: begins, toMs } = reason
        const tells = begins + onMs
        // What ended before its delay was over is not told, nor what had ended before anybody looked.
        const tooShort = toMs !== null && (toMs <= tells || toMs + offMs <= fromMs)
        if (!open.has(key) && tells < untilMs && !tooShort) {
          open.set(key, { key, what, priority })
          changes.push(change(true, Math.max(tells, fromMs), begins, reason))
        }
        if (open.has(key) && toMs !== null && toMs + offMs < untilMs) {
          open.delete(key)
          changes.push(change(false, Math.max(toMs + offMs, fromMs), toMs, reason))
        }
      }
      const known = new Set(reasons.map(({ key }) => key))
      for (const gone of open.values()) {
        if (known.has(gone.key)) continue
        open.delete(gone.key)
        changes.push(change(false, fromMs, fromMs, { ...gone, text: `${gone.what}.` }))
      }
      return changes
    },
    verdict: () => EVALUABLE,
    memory: () => ({ open: [...open.values()] }),
  }
}

/** A16: calibration, filament and sensitivity, each from the instant on at which it was so. */
export function judgeGaugeHealth(of: Case<GaugeHealthFacts>): Judge {
  const { calibrationDueMs, filament, sensitivity } = of.facts
  const { tag } = of.subject
  const { priority } = of.content
  const reasons: Reason[] = []
  if (calibrationDueMs !== null) {
    const days = figure(of, 'calibrationDays')
    reasons.push({
      key: `calibration:${calibrationDueMs}`,
      fromMs: calibrationDueMs - days * DAY_MS,
      toMs: null,
      priority,
      value: days,
      limit: days,
      unit: 'd',
      what: `${tag} calibration due ${utcText(calibrationDueMs).slice(0, 10)}`,
      text: `The calibration of ${tag} is due on ${utcText(calibrationDueMs).slice(0, 10)}, told from ${days} days before.`,
    })
  }
  const used = filament === null ? 0 : filament.hours / filament.lifeHours
  if (filament !== null && used > figure(of, 'filamentShare')) {
    const percent = 100 * figure(of, 'filamentShare')
    reasons.push({
      key: 'filament',
      fromMs: filament.asOfMs,
      toMs: null,
      priority,
      value: 100 * used,
      limit: percent,
      unit: '%',
      what: `${tag} filament ${(100 * used).toFixed(0)} % of its life (limit ${percent.toFixed(0)})`,
      text: `The filament of ${tag} has run ${filament.hours.toFixed(0)} of about ${filament.lifeHours.toFixed(0)} hours.`,
    })
  }
  const changed = sensitivity === null ? 1 : Math.max(sensitivity.ratio, 1 / sensitivity.ratio)
  if (sensitivity !== null && changed > figure(of, 'sensitivity')) {
    reasons.push({
      key: `sensitivity:${sensitivity.foundMs}`,
      fromMs: sensitivity.foundMs,
      toMs: null,
      priority,
      value: sensitivity.ratio,
      limit: figure(of, 'sensitivity'),
      unit: '',
      what: `${tag} sensitivity changed ${figureText(sensitivity.ratio, '')} times`,
      text: `The sensitivity of ${tag} is ${figureText(sensitivity.ratio, '')} times what it was.`,
    })
  }
  const judge = judgeReasons(of, reasons)
  if (calibrationDueMs !== null || filament !== null || sensitivity !== null) return judge
  const nothing = `${tag}: neither its calibration date nor its filament hours are known.`
  return { ...judge, verdict: () => notEvaluable(nothing) }
}

/** A18: told so long ahead, or as soon as there is such a plan. */
export function judgePower(of: Case<PowerFacts>): Judge {
  const { hours, plannedMs } = of.facts
  const aheadMs = 1000 * figure(of, 'aheadS')
  const over = hours.filter(({ kW, capKW }) => kW > capKW + figure(of, 'slackKW'))
  const judge = judgeReasons(
    of,
    over.map(({ fromMs, toMs, kW, capKW, where }) => ({
      key: `${where}:${fromMs}`,
      fromMs: Math.max(fromMs - aheadMs, plannedMs),
      toMs,
      priority: of.content.priority,
      value: kW,
      limit: capKW,
      unit: 'kW',
      what: `${where} ${kW.toFixed(0)} kW planned from ${utcText(fromMs)} (cap ${capKW.toFixed(0)})`,
      text: `From ${utcText(fromMs)} ${kW.toFixed(0)} kW are planned on ${where}, which carries ${capKW.toFixed(0)} kW.`,
    })),
  )
  return hours.length > 0
    ? judge
    : { ...judge, verdict: () => notEvaluable('No plan, or no cap, to sum up against.') }
}

/** A19: two notices before a live permit ends, and the dangers that the permits' own watch has found. */
export function judgePermit(of: Case<PermitFacts>): Judge {
  const { validity, dangers } = of.facts
  const { tag } = of.subject
  const notice = (
    { fromMs, toMs, untilMs }: PermitFacts['validity'][number],
    beforeS: number,
    priority: AlertPriority,
  ): Reason[] => {
    const begins = Math.max(untilMs - 1000 * beforeS, fromMs)
    const ends = Math.min(untilMs, toMs ?? untilMs)
    if (ends <= begins) return []
    const hours = figureText(beforeS / 3600, 'h')
    return [
      {
        key: `ends:${untilMs}:${beforeS}`,
        fromMs: begins,
        toMs: ends,
        priority,
        value: beforeS / 3600,
        limit: beforeS / 3600,
        unit: 'h',
        what: `permit ${tag} ends in ${hours} or less, at ${utcText(untilMs)}`,
        text: `${tag} is valid until ${utcText(untilMs)}.`,
      },
    ]
  }
  return judgeReasons(of, [
    ...validity.flatMap((one) => [
      ...notice(one, figure(of, 'firstS'), of.content.priority),
      ...notice(one, figure(of, 'lastS'), 'high'),
    ]),
    ...dangers.map((danger) => ({ ...danger, text: `${danger.what}.` })),
  ])
}

/** A20. */
export function judgeEntries(of: Case<EntryFacts>): Judge {
  return judgeReasons(
    of,
    of.facts.entries.map((entry) => ({
      ...entry,
      priority: of.content.priority,
      text: `${entry.what}.`,
    })),
  )
}

/** A22: mails that were given up, and steps of the ladder with nobody on them. */
export function judgeMail(of: Case<MailFacts>): Judge {
  const { failures, holes } = of.facts
  const { priority } = of.content
  const tries = figure(of, 'tries')
  return judgeReasons(of, [
    ...failures
      .filter((failure) => failure.tries >= tries)
      .map((failure) => ({
        ...failure,
        key: `mail:${failure.key}`,
        priority,
        value: failure.tries,
        limit: tries,
        unit: '',
        text: `${failure.what} (${failure.tries} tries).`,
      })),
    ...holes.map((hole) => ({ ...hole, key: `hole:${hole.key}`, priority, text: `${hole.what}.` })),
  ])
}
