/** K3, K4, K9, K10, K11 and K12: work by others in the tunnel, and what it would meet here. */
import type { PlannedWorkKind } from '../permit-words.ts'
import { overlaps, type Stretch, shared, zonesAround } from '../tunnel-stretch.ts'
import {
  type ConflictFacts,
  exclusionReach,
  type Finding,
  type GateValve,
  needsExclusion,
  type WorkFact,
} from './facts.ts'
import { ahead, meet, stretchText, tagsText, workSpan, workText } from './words.ts'

/** Kinds that let gas in, or people. */
const OPENS: readonly PlannedWorkKind[] = ['vent', 'opening', 'entry']
/** Kinds that concern the whole site where they name no place. */
const SITE_WIDE: readonly PlannedWorkKind[] = ['power-maintenance', 'visit', 'fire-detection-off']

/** Work that is still to come or going on, in the time of this permit. */
function worksThen(facts: ConflictFacts): WorkFact[] {
  const own = ahead(facts)
  if (own === null) return []
  return facts.works.filter(
    (work) =>
      (work.state === 'planned' || work.state === 'limited' || work.state === 'started') &&
      meet(own, workSpan(work, facts.now)),
  )
}

/** The heated segments with the tunnel that nobody may enter around them. */
function exclusionZones(facts: ConflictFacts): Stretch[] {
  const { own, limits, joints } = facts
  if (!needsExclusion(own, limits)) return []
  const reach = exclusionReach(own, limits)
  return own.segments.flatMap((segment) => zonesAround(segment, reach, joints))
}

/** The part of a stretch that lies in one of the zones; the longest where there are several. */
function within(stretch: Stretch, zones: readonly Stretch[]): Stretch | null {
  const parts = zones.flatMap((zone) => shared(stretch, zone) ?? [])
  return parts.toSorted((a, b) => b.toM - b.fromM - (a.toM - a.fromM))[0] ?? null
}

function hasPeople(work: WorkFact): boolean {
  return work.kind !== 'fire-detection-off' || work.people !== ''
}

function heatText({ own }: ConflictFacts): string {
  return own.maxCelsius === null ? 'heated, how hot is not said yet' : `heated up to ${own.maxCelsius} °C`
}

/** K3: people where it is hot. */
export function peopleNear(facts: ConflictFacts): Finding[] {
  const { own, zone, limits } = facts
  const zones = exclusionZones(facts)
  if (zones.length === 0) return []
  const { westM, eastM } = exclusionReach(own, limits)
  const reach = westM === eastM ? `${westM} m` : `${westM} m to the west and ${eastM} m to the east`
  return worksThen(facts)
    .filter(hasPeople)
    .flatMap((work): Finding[] => {
      const what = workText(work, zone)
      if (work.stretch === null) {
        if (SITE_WIDE.includes(work.kind)) return []
        return [
          {
            key: `K3:work:${work.id}`,
            rule: 'K3',
            effect: 'ruling',
            text: `${what} does not say where people will be, so they may come within ${reach} of ${tagsText(own.segments)}, ${heatText(facts)}.`,
            wayOut: 'Enter the stretch of that work, or an officer rules which barrier keeps people out.',
            place: null,
          },
        ]
      }
      const inside = within(work.stretch, zones)
      if (inside === null) return []
      const onHeat = own.segments.some((segment) => overlaps(segment, work.stretch as Stretch))
      // Lifting over the heated segment, and opening it, have rules of their own, and both are blocked by them.
      if (onHeat && (work.kind === 'lifting' || OPENS.includes(work.kind))) return []
      return [
        {
          key: `K3:work:${work.id}`,
          rule: 'K3',
          effect: onHeat ? 'block' : 'ruling',
          text: `${what} has people ${onHeat ? 'at' : `within ${reach} of`} ${tagsText(own.segments)}, ${heatText(facts)}: ${stretchText(inside)}.`,
          wayOut: onHeat
            ? 'Move that work to another time, or have an officer limit it to a stretch outside. What has to be done at the segment is done by the crew of this permit.'
            : `An officer limits that work to a stretch outside ${stretchText(inside)} with a barrier, or rules here which barrier keeps people out. Or move one of the two in time.`,
          place: inside,
        },
      ]
    })
}

/** K4: gas or people let in next door, with a gate valve between. */
export function openingNextDoor(facts: ConflictFacts): Finding[] {
  const { own, zone } = facts
  const openings = worksThen(facts)
    .filter(({ kind, stretch }) => OPENS.includes(kind) && stretch !== null)
    .map((work) => ({
      key: `work:${work.id}`,
      what: workText(work, zone),
      tags: facts.segments.filter((place) => overlaps(place, work.stretch as Stretch)).map(({ tag }) => tag),
      stretch: work.stretch as Stretch,
    }))
  const open =
    ahead(facts) === null
      ? []
      : facts.segments.filter(({ state }) => state === 'vented' || state === 'not-assembled')
  const standing = open.map(({ tag, line, fromM, toM }) => ({
    key: `state:${tag}`,
    what: `${tag}, which is recorded as open to gas,`,
    tags: [tag],
    stretch: { line, fromM, toM },
  }))
  return [...openings, ...standing].flatMap(({ key, what, tags, stretch }) => {
    const here = own.segments.find(({ tag }) => tags.includes(tag))
    if (here !== undefined) {
      return key.startsWith('state:')
        ? []
        : [
            {
              key: `K4:${key}`,
              rule: 'K4' as const,
              effect: 'block' as const,
              text: `${what} opens ${here.tag}, which this permit heats.`,
              wayOut: 'Move that work to a time after this permit has been cancelled.',
              place: shared(stretch, here) ?? { line: here.line, fromM: here.fromM, toM: here.toM },
            },
          ]
    }
    return facts.valves
      .filter(({ west, east }) => joins(own.segments, tags, west, east))
      .flatMap((valve) => atValve(facts, valve, key, what))
  })
}

function joins(
  own: ConflictFacts['own']['segments'],
  tags: readonly string[],
  west: string | null,
  east: string | null,
): boolean {
  const mine = (tag: string | null) => own.some((one) => one.tag === tag)
  const theirs = (tag: string | null) => tag !== null && tags.includes(tag)
  return (mine(west) && theirs(east)) || (mine(east) && theirs(west))
}

function atValve({ own }: ConflictFacts, valve: GateValve, key: string, what: string): Finding[] {
  const named = new RegExp(`(^|[^A-Za-z0-9])${valve.tag.replace(/[^A-Za-z0-9]/g, '\\$&')}($|[^A-Za-z0-9])`)
  const point = own.points.find(
    ({ tag, isolates, required }) =>
      (named.test(isolates) || named.test(tag)) && /\b(shut|closed)\b/i.test(required),
  )
  if (point?.holds) return []
  const place = { line: valve.line, fromM: valve.atM, toM: valve.atM }
  const base = { key: `K4:${key}:${valve.tag}`, rule: 'K4' as const, place }
  if (point !== undefined) {
    return [
      {
        ...base,
        effect: 'warning',
        text: `${what} lies behind ${valve.tag}. Point ${point.tag} asks for that valve to be shut; it is not locked and verified yet.`,
        wayOut: `${point.tag} has to be locked and verified before this permit is accepted, and before anything is opened next door.`,
      },
    ]
  }
  return [
    {
      ...base,
      effect: 'block',
      text: `${what} lies behind ${valve.tag}, and no isolation point of this permit keeps that valve shut.`,
      wayOut: `Add an isolation point for ${valve.tag}, required shut, with a lock of its own; or move that work.`,
    },
  ]
}

/** K9: nobody would notice a fire. */
export function fireDetection(facts: ConflictFacts): Finding[] {
  const zones = exclusionZones(facts)
  const near = zones.length === 0 ? facts.own.segments : zones
  return worksThen(facts)
    .filter(
      ({ kind, stretch }) =>
        kind === 'fire-detection-off' && (stretch === null || within(stretch, near) !== null),
    )
    .map((work) => ({
      key: `K9:work:${work.id}`,
      rule: 'K9',
      effect: 'ruling',
      text: `${workText(work, facts.zone)}: fire detection is out of order where this permit heats.`,
      wayOut: 'An officer rules who watches instead, from when until when. Or move one of the two in time.',
      place: work.stretch === null ? null : within(work.stretch, near),
    }))
}

/** K10: a load over a heated segment. */
export function liftingOver(facts: ConflictFacts): Finding[] {
  return worksThen(facts).flatMap((work): Finding[] => {
    if (work.kind !== 'lifting' || work.stretch === null) return []
    const over = within(work.stretch, facts.own.segments)
    if (over === null) return []
    return [
      {
        key: `K10:work:${work.id}`,
        rule: 'K10',
        effect: 'block',
        text: `${workText(work, facts.zone)} goes over ${tagsText(facts.own.segments)} while this permit may heat: ${stretchText(over)}.`,
        wayOut:
          'Move the lift to another time, or have an officer limit it to a stretch outside the segment.',
        place: over,
      },
    ]
  })
}

/** K11, first part: work on the power and visits. */
export function siteEvents(facts: ConflictFacts): Finding[] {
  return worksThen(facts)
    .filter(({ kind, stretch }) => kind === 'power-maintenance' || (kind === 'visit' && stretch === null))
    .map((work) => ({
      key: `K11:work:${work.id}`,
      rule: 'K11',
      effect: 'warning',
      text: `${workText(work, facts.zone)} falls into the window.`,
      wayOut:
        work.kind === 'visit'
          ? 'Tell whoever leads the visit where the barriers stand.'
          : 'Agree with those who work on the power what happens to supplies, fans and monitors in that time.',
      place: work.stretch,
    }))
}

/** K12: tracer gas at hot steel says nothing true, and the one who sprays may be burnt. */
export function sprayNear(facts: ConflictFacts): Finding[] {
  const zones = exclusionZones(facts)
  return worksThen(facts).flatMap((work): Finding[] => {
    if (work.kind !== 'leak-check' || work.stretch === null) return []
    const inside = within(work.stretch, zones)
    if (inside === null) return []
    return [
      {
        key: `K12:work:${work.id}`,
        rule: 'K12',
        effect: 'warning',
        text: `${workText(work, facts.zone)} would spray close to hot steel: ${stretchText(inside)}. Hot joints give false results there, and burn.`,
        wayOut: 'Test those joints once the segment is cold.',
        place: inside,
      },
    ]
  })
}
