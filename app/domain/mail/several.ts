/** One mail that stands for several: alerts of a segment that came together, and the rest of a flood. */
import { ALERT_PRIORITIES, ALERT_PRIORITY_LABELS, type AlertPriority } from '../alert-words.ts'
import type { ComposedMail } from './compose.ts'
import { escapeHtml, headerSafe, MAIL_COLUMNS, wrap } from './text.ts'

interface OneOfSeveral extends ComposedMail {
  priority: AlertPriority
}

/** The most urgent of several priorities. */
export function mostUrgent(priorities: readonly AlertPriority[]): AlertPriority {
  return ALERT_PRIORITIES.find((priority) => priorities.includes(priority)) ?? 'low'
}

/** The most urgent first; among equals the order in which they came. */
function byUrgency<One extends { priority: AlertPriority }>(mails: readonly One[]): One[] {
  return mails.toSorted((a, b) => ALERT_PRIORITIES.indexOf(a.priority) - ALERT_PRIORITIES.indexOf(b.priority))
}

/**
 * Several mails of one segment as one: the subject of the most urgent, with how many more there are, and all of their
 * texts one below the other.
 *
 * @param mails at least one, in the order in which they came
 */
export function composeGroup(mails: readonly OneOfSeveral[]): ComposedMail {
  const ordered = byUrgency(mails)
  const [lead] = ordered
  if (lead === undefined) throw new RangeError('A mail for several alerts needs at least one.')
  if (ordered.length === 1) return lead
  const more = ordered.length - 1
  const lines = wrap(`${ordered.length} alerts that came together, the most urgent first:`)
  const heads = ordered.map(({ subject }, index) => wrap(`${index + 1}. ${subject}`)).join('\n')
  const rule = '-'.repeat(MAIL_COLUMNS)
  return {
    subject: headerSafe(`${lead.subject} and ${more} more`),
    text: [`${lines}\n${heads}`, ...ordered.map(({ text }) => text)].join(`\n${rule}\n`),
    html: [
      `<p>${ordered.length} alerts that came together, the most urgent first:</p>`,
      `<ol>${ordered.map(({ subject }) => `<li>${escapeHtml(subject)}</li>`).join('')}</ol>`,
      ...ordered.map(({ html }) => `<hr>\n${html}`),
    ].join('\n'),
  }
}

/** Of so many a summary names the subjects; the page has all. */
const NAMED = 60

export interface SummaryFacts {
  siteCode: string
  /** What was kept back, in the order in which it came. */
  mails: readonly { subject: string; priority: AlertPriority }[]
  /** How many mails went out by themselves before that, and within how many minutes. */
  sentBefore: number
  minutes: number
  /** Address of the page of alerts; null when nobody has set where people reach the product. */
  link: string | null
}

/** `[QFL] HIGH 37 further alerts, see the page`: what the flood guard kept back, with all subjects. */
export function composeSummary({ siteCode, mails, sentBefore, minutes, link }: SummaryFacts): ComposedMail {
  const ordered = byUrgency(mails)
  const urgency = ALERT_PRIORITY_LABELS[mostUrgent(mails.map(({ priority }) => priority))].toUpperCase()
  const count = `${mails.length} further ${mails.length === 1 ? 'alert mail' : 'alert mails'}`
  const why = `You got ${sentBefore} mails within ${minutes} minutes. So that the next one is not lost among them, ${count} became this one.`
  const named = ordered.slice(0, NAMED)
  const rest = ordered.length - named.length
  const restWords = rest === 0 ? '' : `and ${rest} more, which the page shows.`
  const where = link === null ? 'All of them are on the page Alerts of the logbook.' : `All of them: ${link}`
  return {
    subject: headerSafe(`[${siteCode}] ${urgency} ${count}, see the page`),
    text: [
      wrap(why),
      ...named.map(({ subject }) => wrap(`* ${subject}`)),
      ...(restWords === '' ? [] : [wrap(restWords)]),
      wrap(where),
    ].join('\n'),
    html: [
      `<p>${escapeHtml(why)}</p>`,
      `<ul>${named.map(({ subject }) => `<li>${escapeHtml(subject)}</li>`).join('')}</ul>`,
      ...(restWords === '' ? [] : [`<p>${escapeHtml(restWords)}</p>`]),
      link === null
        ? `<p>${escapeHtml(where)}</p>`
        : `<p>All of them: <a href="${escapeHtml(link)}">${escapeHtml(link)}</a></p>`,
    ].join('\n'),
  }
}
