/**
 * What stands in the way of a permit's next step, computed from what is on record. Nothing here can be ticked: a thing
 * is done when it has been done and written down. The rules themselves are in domain/permits.ts, which refuses whatever
 * this list says.
 */
import type { PermitFacts } from './permit-facts.ts'
import type { PermitAct } from './permit-words.ts'

export interface CheckItem {
  text: string
  /** `not-set`: the site has not adopted a value that this rests on. */
  status: 'done' | 'not-done' | 'not-set'
  /** What exactly is missing. */
  missing: string[]
}

export interface Checklist {
  title: string
  items: CheckItem[]
}

/** The list for a permit's next step; null where no step is ahead that has conditions. */
export function permitChecklist(facts: PermitFacts): Checklist | null {
  switch (facts.permit.state) {
    case 'draft':
    case 'returned':
      return { title: 'Before it is asked for', items: [completeness(facts)] }
    case 'requested':
      return {
        title: 'Before it is approved',
        items: [completeness(facts), thresholds(facts), ...conflicts(facts)],
      }
    case 'approved':
      return {
        title: 'Before it may be live',
        items: [points(facts), tests(facts), siteCheck(facts, 'approve'), acceptance()],
      }
    case 'suspended':
      return {
        title: 'Before the work goes on',
        items: [madeSafe(facts), points(facts), tests(facts), siteCheck(facts, 'suspend')],
      }
    case 'issued':
      return { title: 'While it is live', items: [points(facts), tests(facts)] }
    case 'expired':
      return { title: 'Now', items: [heatingOff(facts), handedBack()] }
    case 'handed-back':
      return { title: 'Before it is cancelled', items: [heatingOff(facts), locksOff(facts)] }
    default:
      return null
  }
}

function item(text: string, missing: string[]): CheckItem {
  return { text, status: missing.length === 0 ? 'done' : 'not-done', missing }
}

function completeness({ missing }: PermitFacts): CheckItem {
  return item(
    'Every section says what it has to',
    missing.map(({ text }) => text),
  )
}

function thresholds({ unadopted }: PermitFacts): CheckItem {
  return {
    text: 'Cautions rest on values that this site has adopted',
    status: unadopted.length === 0 ? 'done' : 'not-set',
    missing: unadopted.map(({ text }) => text),
  }
}

function conflicts({ conflicts: found }: PermitFacts): CheckItem[] {
  const blocks = found.filter(({ effect }) => effect === 'block')
  const open = found.filter(
    ({ effect, ruling }) => effect === 'ruling' && (ruling === null || ruling.stale || !ruling.allowed),
  )
  return [
    item(
      'Nothing blocks it',
      blocks.map(({ rule, text, wayOut }) => `${rule}: ${text} ${wayOut}`),
    ),
    item(
      'An officer has ruled on each conflict that needs it',
      open.map(({ rule, text, ruling }) => `${rule}: ${text} ${rulingWord(ruling)}`),
    ),
  ]
}

function rulingWord(ruling: PermitFacts['conflicts'][number]['ruling']): string {
  if (ruling === null) return 'No ruling yet.'
  return ruling.stale ? 'The ruling was given on other facts.' : 'Ruled: not allowed.'
}

function points({ permit, points: applied }: PermitFacts): CheckItem {
  const missing = permit.content.points.flatMap(({ tag }) => {
    const own = applied.filter((point) => point.tag === tag && !point.removed)
    if (own.some(({ holds }) => holds)) return []
    return [
      own.some(({ lockNumber }) => lockNumber !== null) ? `${tag}: locked, not verified` : `${tag}: no lock`,
    ]
  })
  return item(
    `${permit.content.points.length} isolation points locked and verified by a second person`,
    missing,
  )
}

function tests({ tests: taken }: PermitFacts): CheckItem {
  const missing = taken.filter(({ state }) => state !== 'good').map(({ text }) => text)
  return item('Tests passed and in date', missing)
}

/** The site has to be looked at again after each approval and each stop. */
function siteCheck({ acts }: PermitFacts, since: PermitAct): CheckItem {
  const from = acts.findLastIndex(({ act }) => act === since)
  const done = acts.findLastIndex(({ act }) => act === 'site-check') > from
  const after = since === 'suspend' ? 'since the stop' : 'since the approval'
  return item('Site checked with its barriers in place', done ? [] : [`not ${after}`])
}

function acceptance(): CheckItem {
  return item('Holder accepts it on site', ['not yet'])
}

function madeSafe({ acts }: PermitFacts): CheckItem {
  const from = acts.findLastIndex(({ act }) => act === 'suspend' || act === 'return-to-holder')
  const done = acts.findLastIndex(({ act }) => act === 'made-safe') > from
  return item('Made safe, with how and by whom', done ? [] : ['nobody has written it down'])
}

/** Unknown is not off. */
function heatingOff({ heating }: PermitFacts): CheckItem {
  return item('Heating is off', heating.on === false ? [] : [heating.text])
}

function handedBack(): CheckItem {
  return item('Holder hands it back', ['not yet'])
}

function locksOff({ locksOut }: PermitFacts): CheckItem {
  return item(
    'No lock hangs for it any more',
    locksOut.map((lock) => `${lock} still hangs`),
  )
}
