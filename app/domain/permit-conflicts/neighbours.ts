/** K1, K2, K6 and K7: what two permits cannot have at once. */
import { metresBetween, type Stretch } from '../tunnel-stretch.ts'
import type { ConflictFacts, ConflictPermit, Finding, GateValve, Place } from './facts.ts'
import { ahead, meet, metres, type Span, spanText, tagsText } from './words.ts'

/** One person cannot hold two live permits further apart than this, metres (own choice of the rules of permits). */
const HOLDER_REACH_M = 150

interface Other extends ConflictPermit {
  window: Span
}

/** Permits whose window meets what is left of this one's. One that has run out or is handed back still claims. */
function meeting(facts: ConflictFacts): Other[] {
  const own = ahead(facts)
  if (own === null) return []
  return facts.others.flatMap((other) => {
    if (other.from === null || other.to === null) return []
    const window = { from: other.from, to: other.to }
    // Until an officer has cancelled it, its locks hang and nobody has looked.
    const open = other.state === 'expired' || other.state === 'handed-back'
    const claims = {
      from: window.from,
      to: open && other.to <= facts.now ? new Date(facts.now.getTime() + 1) : other.to,
    }
    return meet(own, claims) ? [{ ...other, window }] : []
  })
}

function named({ number, segments, window }: Other, zone: string): string {
  return `${number} (${tagsText(segments)}, ${spanText(window, zone)})`
}

/** K1: one segment, two permits. */
export function sameSegment(facts: ConflictFacts): Finding[] {
  return meeting(facts).flatMap((other) =>
    facts.own.segments
      .filter(({ tag }) => other.segments.some((one) => one.tag === tag))
      .map(
        (place): Finding => ({
          key: `K1:${place.tag}:${other.number}`,
          rule: 'K1',
          effect: 'block',
          text: `${place.tag} is claimed by ${named(other, facts.zone)} in the same time.`,
          wayOut: `Ask for a window that begins when ${other.number} ends or later, or have ${other.number} closed first.`,
          place: stretchOf(place),
        }),
      ),
  )
}

function stretchOf({ line, fromM, toM }: Stretch): Stretch {
  return { line, fromM, toM }
}

/** K2: heat on both sides of a gate valve, and a valve that two heats would make too hot. */
export function heatOnBothSides(facts: ConflictFacts): Finding[] {
  const { own } = facts
  const others = meeting(facts)
  return facts.valves.flatMap((valve) => {
    const { west, east } = valve
    if (west === null || east === null) return []
    const mine = own.segments.filter(({ tag }) => tag === west || tag === east)
    if (mine.length === 2) return [...pairOfOne(facts, valve), ...tooHot(facts, valve, [own])]
    const [here] = mine
    if (here === undefined) return []
    const next = here.tag === west ? east : west
    return others
      .filter(({ segments }) => segments.some(({ tag }) => tag === next))
      .flatMap((other) => [
        ...acrossPermits(facts, valve, here, next, other),
        ...tooHot(facts, valve, [own, other]),
      ])
  })
}

function at(valve: GateValve): Stretch {
  return { line: valve.line, fromM: valve.atM, toM: valve.atM }
}

function pairOfOne({ own }: ConflictFacts, valve: GateValve): Finding[] {
  const planned = own.plan?.segments ?? []
  if (own.segments.every(({ tag }) => planned.includes(tag))) return []
  return [
    {
      key: `K2:${valve.tag}`,
      rule: 'K2',
      effect: 'block',
      text: `${valve.tag} at ${metres(valve.atM)} m would have heat on both sides, from ${tagsText(own.segments)}, and no bake plan heats the two as a pair in series.`,
      wayOut:
        'Draw the permit up from a bake plan that names both segments, or ask for one segment at a time.',
      place: at(valve),
    },
  ]
}

function acrossPermits(
  facts: ConflictFacts,
  valve: GateValve,
  here: Place,
  next: string,
  other: Other,
): Finding[] {
  const { plan } = facts.own
  const onePair =
    plan !== null &&
    plan.id === other.plan?.id &&
    [here.tag, next].every((tag) => plan.segments.includes(tag))
  if (onePair) return []
  return [
    {
      key: `K2:${valve.tag}:${other.number}`,
      rule: 'K2',
      effect: 'block',
      text: `${valve.tag} at ${metres(valve.atM)} m would have heat on both sides: ${here.tag} by this permit and ${next} by ${named(other, facts.zone)}.`,
      wayOut: `Heat the two one after the other, or as a pair in series by one bake plan that both permits rest on.`,
      place: at(valve),
    },
  ]
}

/** A part between two heats is taken to follow the hotter of them by the share that the register gives. */
function tooHot(
  { ambientC }: ConflictFacts,
  valve: GateValve,
  permits: readonly ConflictPermit[],
): Finding[] {
  const hottest = Math.max(...permits.map(({ maxCelsius }) => maxCelsius ?? ambientC))
  const reachesC = ambientC + valve.partRiseShare * (hottest - ambientC)
  if (reachesC <= valve.limitC + 1e-9) return []
  return [
    {
      key: `K2:limit:${valve.tag}`,
      rule: 'K2',
      effect: 'block',
      text: `${valve.tag} at ${metres(valve.atM)} m stands between two heated segments: at ${hottest} °C its limited part comes to about ${reachesC.toFixed(0)} °C, and its limit is ${valve.limitC} °C.`,
      wayOut: 'Ask for a lower temperature, or heat the two segments one after the other.',
      place: at(valve),
    },
  ]
}

/** K6: a bay fan or other equipment that two permits rest on. Two on one segment are stopped by K1. */
export function sharedUtilities(facts: ConflictFacts): Finding[] {
  const { own, fans, valves } = facts
  const apart = new Set([...valves.map(({ tag }) => tag), own.supply, own.cart])
  const elsewhere = meeting(facts).filter(
    ({ segments }) => !segments.some(({ tag }) => own.segments.some((one) => one.tag === tag)),
  )
  return elsewhere.flatMap((other) => {
    const things = own.equipment.filter((tag) => !apart.has(tag) && other.equipment.includes(tag))
    const ownFans = fansOf(own, fans)
    const both = fansOf(other, fans).filter(({ tag }) => ownFans.some((one) => one.tag === tag))
    return [
      ...[...new Set(things)].map((tag) =>
        sharedThing(
          `${tag} is on the list of equipment of this permit and of ${named(other, facts.zone)}.`,
          tag,
          other,
          null,
        ),
      ),
      ...both.map(({ tag, line, atM }) =>
        sharedThing(
          `${tag}, the extraction fan at ${metres(atM)} m, serves ${tagsText(own.segments)} as well as ${named(other, facts.zone)}.`,
          tag,
          other,
          { line, fromM: atM, toM: atM },
        ),
      ),
    ]
  })
}

function sharedThing(text: string, tag: string, other: Other, place: Stretch | null): Finding {
  return {
    key: `K6:${tag}:${other.number}`,
    rule: 'K6',
    effect: 'ruling',
    text,
    wayOut: `An officer rules whether ${tag} carries both, and what is done on both sides when it fails. Or use another one, or another time.`,
    place,
  }
}

/** The fan nearest to the middle of each segment serves it. */
function fansOf({ segments }: ConflictPermit, fans: ConflictFacts['fans']): ConflictFacts['fans'][number][] {
  return segments.flatMap(({ line, fromM, toM }) => {
    const middle = (fromM + toM) / 2
    const own = fans.filter((fan) => fan.line === line)
    const nearest = own.toSorted((a, b) => Math.abs(a.atM - middle) - Math.abs(b.atM - middle))[0]
    return nearest === undefined ? [] : [nearest]
  })
}

/** K7: one lock, one cart, one holder too far apart. */
export function sameHands(facts: ConflictFacts): Finding[] {
  const { own } = facts
  return meeting(facts).flatMap((other) => [
    ...own.locks
      .filter((lock) => other.locks.includes(lock))
      .map((lock) =>
        blocked(
          `K7:lock:${lock}:${other.number}`,
          `Lock ${lock} is entered for this permit and for ${named(other, facts.zone)}.`,
          'A lock hangs in one place. Go and look which it is, and mend the other entry.',
        ),
      ),
    ...(own.cart !== null && own.cart === other.cart
      ? [
          blocked(
            `K7:cart:${own.cart}:${other.number}`,
            `Cart ${own.cart} is wanted here and by ${named(other, facts.zone)}.`,
            `Use another cart, or a window after that of ${other.number}.`,
          ),
        ]
      : []),
    ...holderTooFar(facts, other),
  ])
}

function blocked(key: string, text: string, wayOut: string, place: Stretch | null = null): Finding {
  return { key, rule: 'K7', effect: 'block', text, wayOut, place }
}

function holderTooFar(facts: ConflictFacts, other: Other): Finding[] {
  const { own, joints } = facts
  if (own.holder === null || own.holder.id !== other.holder?.id) return []
  const apart = Math.min(
    ...own.segments.flatMap((a) => other.segments.map((b) => metresBetween(a, b, joints))),
  )
  if (apart <= HOLDER_REACH_M || own.segments.length === 0 || other.segments.length === 0) return []
  const far = Number.isFinite(apart) ? `${metres(apart)} m away` : 'in another tunnel'
  return [
    blocked(
      `K7:holder:${other.number}`,
      `${own.holder.name} would hold this permit and ${named(other, facts.zone)}, ${far}; more than ${HOLDER_REACH_M} m is too far for one person.`,
      'Name another holder for one of the two.',
      own.segments[0] === undefined ? null : stretchOf(own.segments[0]),
    ),
  ]
}

/** K5, first part: one supply set for two permits. */
export function sameSupply(facts: ConflictFacts): Finding[] {
  const { supply } = facts.own
  if (supply === null) return []
  return meeting(facts)
    .filter((other) => other.supply === supply)
    .map((other) => ({
      key: `K5:supply:${supply}:${other.number}`,
      rule: 'K5' as const,
      effect: 'block' as const,
      text: `Supply set ${supply} is wanted here and by ${named(other, facts.zone)}.`,
      wayOut: `Use another set, or a window after that of ${other.number}.`,
      place: null,
    }))
}

/** Permits whose time meets this one's, for the sum of their power. */
export function permitsAtOnce(facts: ConflictFacts): ConflictPermit[] {
  return meeting(facts)
}
