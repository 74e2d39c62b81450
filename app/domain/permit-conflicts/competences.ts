/** K8: competences and licences that a permit needs, and the instant at which one runs out. */
import { instantText } from '../instant-text.ts'
import { COMPETENCE_LABELS } from '../permit-words.ts'
import { siteMoment } from '../schedule/rosters.ts'
import type { CompetenceSpan, ConflictFacts, Finding, NeededCompetence } from './facts.ts'
import { ahead, type Span } from './words.ts'

/** The first instant of a span that none of the competences covers; null when they cover all of it. */
export function firstGap(
  held: readonly Pick<CompetenceSpan, 'from' | 'to'>[],
  { from, to }: Span,
): Date | null {
  let covered = from
  for (const one of held.toSorted((a, b) => a.from.getTime() - b.from.getTime())) {
    if (one.from > covered) break
    if (one.to === null) return null
    if (one.to > covered) covered = one.to
  }
  return covered < to ? covered : null
}

/** K8: everybody whose part needs a competence has it for all of the window that is left. */
export function competencesMissing(facts: ConflictFacts): Finding[] {
  const left = ahead(facts)
  if (left === null) return []
  return facts.own.needs.flatMap((need) => missing(facts, need, left))
}

function missing(facts: ConflictFacts, need: NeededCompetence, left: Span): Finding[] {
  const { competences, own, zone } = facts
  const of = (ids: readonly number[]) =>
    competences.filter(({ personId, kind }) => kind === need.kind && ids.includes(personId))
  const held = of([need.personId])
  if (firstGap(of([need.personId, ...need.standIns.map(({ personId }) => personId)]), left) === null)
    return []
  const gap = firstGap(held, left)
  if (gap === null) return []
  const what = COMPETENCE_LABELS[need.kind]
  const window = own.to === null ? '' : `, and the window runs to ${instantText(own.to, zone)}`
  return [
    {
      key: `K8:person:${need.personId}:${need.kind}`,
      rule: 'K8',
      effect: 'block',
      text: `${need.name}, ${need.as}: ${endText(facts, held, gap, what)}${window}.`,
      wayOut: wayOut(need, gap > left.from ? gap : null, zone),
      place: null,
    },
  ]
}

function endText({ zone }: ConflictFacts, held: readonly CompetenceSpan[], gap: Date, what: string): string {
  const before = held.filter(({ to }) => to !== null && to <= gap).toSorted((a, b) => endOf(b) - endOf(a))[0]
  if (before !== undefined) {
    const number = before.number === '' ? '' : ` ${before.number}`
    const over = endOf(before) < gap.getTime() ? ' ended' : ' ends'
    return `“${what}”${number}${over} ${lastMoment(new Date(endOf(before)), zone)}`
  }
  const later = held
    .filter(({ from }) => from > gap)
    .toSorted((a, b) => a.from.getTime() - b.from.getTime())[0]
  if (later !== undefined) return `“${what}” begins only ${instantText(later.from, zone)}`
  return `no “${what}” has been entered`
}

function endOf({ to }: CompetenceSpan): number {
  return to?.getTime() ?? Number.POSITIVE_INFINITY
}

/** Ends at midnight are said by the day that still counts. */
function lastMoment(end: Date, zone: string): string {
  if (siteMoment(end.getTime(), zone).minuteOfDay !== 0) return instantText(end, zone)
  const day = siteMoment(end.getTime() - 1, zone).date
  return `with the day ${day}, at ${instantText(end, zone)}`
}

function wayOut(need: NeededCompetence, gap: Date | null, zone: string): string {
  const shorter = gap === null ? '' : `, or end the window by ${instantText(gap, zone)}`
  if (need.kind === 'electrician-licence') {
    return `Name another electrician, or a second one among the crew whose licence goes on${shorter}. A licence that has been renewed is entered under People.`
  }
  return `Name somebody else as ${need.as}${shorter}. A competence that has been renewed is entered under People.`
}
