/**
 * What a mail about an alert says, in the order in which somebody who was asleep needs it: what, where, how bad, since
 * when, when we learned of it, what to do now, who owns it, where to read on. The plain text comes first and is whole;
 * the HTML part says the same. Nothing in it acknowledges: mail scanners follow every link.
 */
import { ALERT_PRIORITY_LABELS, type AlertPriority } from '../alert-words.ts'
import { bothTimes, escapeHtml, headerSafe, localTexts, plainFigures, plainValue, wrap } from './text.ts'

export interface AlertMailFacts {
  site: { code: string; timeZone: string }
  kind: 'alert' | 'escalation' | 'clear'
  priority: AlertPriority
  /** Where: the tag of a segment, a source or a permit; empty for the site as a whole. */
  place: string
  /** What and how bad, with its number, for example `spread 24 °C (limit 20)`. */
  title: string
  value: number | null
  limit: number | null
  unit: string
  startedAt: Date
  noticedAt: Date
  clearedAt: Date | null
  /** Further findings, a sentence each. */
  findings: readonly string[]
  /** The rule's four sentences; empty ones are left out. */
  why: string
  whatToDo: string
  howLong: string
  who: string
  ownerName: string | null
  /** What happens if nobody takes it, for example `calls on-call 1 at 02:39`. */
  next: string | null
  /** Why this person gets it, for example `You are on call 1.` */
  because: string | null
  /** Address of the alert's page; null when nobody has set where people reach the product. */
  link: string | null
}

/** What is said, without what the sender puts around it. The HTML is a piece of a page's body. */
export interface ComposedMail {
  subject: string
  text: string
  html: string
}

const ENDINGS = { alert: '', escalation: ' - nobody has taken it', clear: ' - cleared' }

/** `[QFL] HIGH SG-05 spread 24 C (limit 20) since 02:14 +0100`: updates keep the beginning, so that programs group them. */
export function alertSubject(facts: AlertMailFacts): string {
  const since = localTexts(facts.startedAt, facts.site.timeZone)
  const stem = [
    `[${facts.site.code}]`,
    ALERT_PRIORITY_LABELS[facts.priority].toUpperCase(),
    facts.place,
    headerSafe(plainFigures(withoutPlace(facts)), 150),
    `since ${since.time} ${since.offset.replace(':', '')}`,
  ]
  return headerSafe(`${stem.filter((part) => part !== '').join(' ')}${ENDINGS[facts.kind]}`)
}

/** A title that begins with the place does not say it twice. */
function withoutPlace({ title, place }: AlertMailFacts): string {
  return place !== '' && title.startsWith(`${place} `) ? title.slice(place.length + 1) : title
}

/** A mail about one alert. */
export function composeAlertMail(facts: AlertMailFacts): ComposedMail {
  const parts = partsOf(facts)
  const text = parts.map(({ label, words }) => wrap(label === '' ? words : `${label}: ${words}`)).join('\n')
  const html = parts
    .map(({ label, words, link }) => {
      const said = link
        ? `<a href="${escapeHtml(words)}">${escapeHtml(words)}</a>`
        : escapeHtml(words).replaceAll('\n', '<br>')
      return `<p>${label === '' ? said : `<strong>${escapeHtml(label)}:</strong> ${said}`}</p>`
    })
    .join('\n')
  return { subject: alertSubject(facts), text, html }
}

interface Part {
  label: string
  words: string
  link?: boolean
}

function partsOf(facts: AlertMailFacts): Part[] {
  const zone = facts.site.timeZone
  const title = lineOf(withoutPlace(facts))
  const parts: Part[] = [
    { label: '', words: [facts.place, title].filter((part) => part !== '').join('  ') },
    { label: 'Priority', words: ALERT_PRIORITY_LABELS[facts.priority] },
    ...figures(facts),
    ...facts.findings.map((finding) => ({ label: '', words: lineOf(finding) })),
    { label: 'Since', words: `${bothTimes(facts.startedAt, zone)}.` },
    { label: 'We learned of it', words: `${bothTimes(facts.noticedAt, zone)}.` },
  ]
  if (facts.clearedAt !== null)
    parts.push({ label: 'Cleared', words: `${bothTimes(facts.clearedAt, zone)}, by itself.` })
  const doing = facts.kind === 'clear' ? [] : [{ label: 'Do now', words: facts.whatToDo }]
  parts.push(
    ...[
      ...doing,
      { label: 'Time there is', words: facts.howLong },
      { label: 'Who acts', words: facts.who },
      { label: 'Why it matters', words: facts.why },
    ]
      .map(({ label, words }) => ({ label, words: lineOf(words) }))
      .filter(({ words }) => words !== '' && facts.kind !== 'clear'),
  )
  parts.push({ label: 'Owner', words: lineOf(facts.ownerName ?? 'nobody yet') })
  if (facts.next !== null && facts.kind !== 'clear') parts.push({ label: 'Next', words: lineOf(facts.next) })
  if (facts.because !== null) parts.push({ label: 'You get this because', words: lineOf(facts.because) })
  return [...parts, ...reading(facts)]
}

function reading({ link, kind }: AlertMailFacts): Part[] {
  if (link === null) return [{ label: '', words: 'Read on, and take it, on the page Alerts of the logbook.' }]
  const opened = { label: 'Open', words: link, link: true }
  if (kind === 'clear') return [opened]
  return [opened, { label: '', words: 'Opening this does not take the alert: press "I own it" on its page.' }]
}

/** The number and its limit once more in letters that any device shows. */
function figures({ value, limit, unit }: AlertMailFacts): Part[] {
  if (value === null) return []
  const against = limit === null ? '' : `, limit ${plainValue(limit, unit)}`
  return [{ label: 'In figures', words: `${plainValue(value, unit)}${against}` }]
}

/** Free words on one line, so that none of them can look like a line of ours. */
function lineOf(text: string): string {
  return headerSafe(text, 900)
}
