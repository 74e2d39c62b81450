/** When a mail goes: what waits for company, what waits for the morning, what is kept back in a flood. */
import type { AlertPriority, MailKind } from '../alert-words.ts'
import { readLocalTime } from '../schemas/instant.ts'
import { localTexts } from './text.ts'

/** Alerts of one segment that come within this time become one mail. */
export const GROUP_WAIT_MS = 2 * 60_000

/** More mails than this to a person within FLOOD_WINDOW_MS become one. */
export const FLOOD_MAILS = 10
export const FLOOD_WINDOW_MS = 10 * 60_000
/** How long a summary waits for the rest of its flood. */
const SUMMARY_WAIT_MS = 2 * 60_000

/** A site time of day HH:MM between which medium and low mails wait. Empty texts: never. */
export interface QuietHours {
  from: string
  until: string
}

/** Whether mails with this about them wait for others of their segment. The highest wait for nothing. */
export function waitsForCompany(kind: MailKind, priority: AlertPriority): boolean {
  return priority !== 'highest' && (kind === 'alert' || kind === 'clear')
}

/** Whether a mail may be kept back in a flood: about alerts, and none of the highest priority. */
export function mayBeFolded(kind: MailKind, priority: AlertPriority): boolean {
  return priority !== 'highest' && (kind === 'alert' || kind === 'escalation' || kind === 'clear')
}

/**
 * When quiet hours that have begun end, or null when none are on: for medium and low ones only. Both ends are times on
 * the wall clock; a night may pass midnight, and one that holds a change of clocks is an hour longer or shorter.
 */
export function quietUntil(quiet: QuietHours, priority: AlertPriority, now: Date, zone: string): Date | null {
  if (priority === 'highest' || priority === 'high') return null
  const { from, until } = quiet
  if (from === '' || until === '' || from === until) return null
  const { day, time } = localTexts(now, zone)
  const within = from < until ? time >= from && time < until : time >= from || time < until
  if (!within) return null
  const tomorrow = from > until && time >= from
  const endDay = tomorrow ? nextDay(day) : day
  const end = wallTime(endDay, until, zone)
  // A morning time that comes twice, and of which the first is over: the second.
  return end.find((at) => at > now) ?? null
}

function nextDay(day: string): string {
  return new Date(Date.parse(`${day}T00:00:00Z`) + 86_400_000).toISOString().slice(0, 10)
}

function wallTime(day: string, time: string, zone: string): Date[] {
  const read = readLocalTime(`${day}T${time}`, zone)
  if (read.kind === 'instant') return [read.at]
  if (read.kind === 'ambiguous') return [read.first, read.second]
  // In the hour that spring leaves out: the first moment after it, which an hour later on the wall is.
  const [hour, minute] = time.split(':').map(Number) as [number, number]
  const later = readLocalTime(
    `${day}T${String(hour + 1).padStart(2, '0')}:${String(minute).padStart(2, '0')}`,
    zone,
  )
  return later.kind === 'instant' ? [later.at] : []
}

export type FloodAnswer = { kind: 'goes' } | { kind: 'folds'; summaryAt: Date }

/**
 * Whether one more mail goes to a person by itself or into a summary.
 *
 * @param gone when mails to them went out within the last FLOOD_WINDOW_MS, summaries left out
 * @param lastSummary when the last summary went to them, or null
 */
export function floodAnswer(gone: readonly Date[], lastSummary: Date | null, machine: Date): FloodAnswer {
  const since = machine.getTime() - FLOOD_WINDOW_MS
  if (gone.filter((at) => at.getTime() > since).length < FLOOD_MAILS) return { kind: 'goes' }
  const soonest = machine.getTime() + SUMMARY_WAIT_MS
  const next = lastSummary === null ? soonest : lastSummary.getTime() + FLOOD_WINDOW_MS
  return { kind: 'folds', summaryAt: new Date(Math.max(soonest, next)) }
}

/** A mail server gets this many tries with growing pauses: about five hours, then it is given up and said. */
export const MOST_ATTEMPTS = 10
const FIRST_PAUSE_MS = 10_000
const LONGEST_PAUSE_MS = 90 * 60_000

/**
 * How long to wait after a failed try: 10 s, 30 s, 90 s … at most 90 minutes, each shortened by up to a third so that
 * what failed together does not come back together.
 *
 * @param attempts how many have failed, from 1
 * @param random from 0 to below 1
 */
export function pauseAfterFailure(attempts: number, random: number): number {
  const whole = Math.min(LONGEST_PAUSE_MS, FIRST_PAUSE_MS * 3 ** Math.max(0, attempts - 1))
  return Math.round(whole * (1 - random / 3))
}

/**
 * What a mail server's reply code (RFC 5321 section 4.2.1) asks for. From 500 on it says no for good; below, or with
 * none at all, it may say yes later.
 */
export function isFinalRefusal(code: number | null): boolean {
  return code !== null && code >= 500 && code < 600
}
