/** K5: power of all permits at once, hour by hour, against the caps of the site and of its feeders. */
import { powerByHour } from '../bake-load.ts'
import { instantText } from '../instant-text.ts'
import { FEEDERS, type Feeder } from '../register.ts'
import { siteMoment } from '../schedule/rosters.ts'
import type { ConflictFacts, ConflictPermit, Finding, Heat } from './facts.ts'
import { permitsAtOnce, sameSupply } from './neighbours.ts'
import { ahead } from './words.ts'

const HOUR_MS = 3_600_000
/** The cap of the day holds between these hours of the site, as the limits of the register say. */
const DAY_FROM_HOUR = 6
const DAY_TO_HOUR = 22
/** Sums of several permits are compared with a cap to this, kW: less is rounding. */
const SLACK_KW = 0.05

/** Highest power in each hour since 1970 in which there is any, kW. */
type Load = Map<number, number>

/** What a permit draws, of all its segments or of those on one feeder, within its window. */
function loadOf(permit: ConflictPermit, ambientC: number, feeder: Feeder | null): Load {
  const { heat, from, to } = permit
  const load: Load = new Map()
  if (heat === null || from === null || to === null) return load
  const segments = heat.segments.filter((one) => feeder === null || one.feeder === feeder)
  if (segments.length === 0) return load
  const startMs = (heat.startsAt ?? from).getTime()
  const hourly = heat.throughTube
    ? throughTube(heat, segments, ambientC, (to.getTime() - startMs) / HOUR_MS)
    : blanketsAlone(segments, (to.getTime() - startMs) / HOUR_MS)
  hourly.forEach((watts, index) => {
    const fromMs = startMs + index * HOUR_MS
    // An hour of the programme touches two hours of the clock unless it begins on one.
    for (let hour = Math.floor(fromMs / HOUR_MS); hour * HOUR_MS < fromMs + HOUR_MS; hour += 1) {
      if ((hour + 1) * HOUR_MS <= from.getTime() || hour * HOUR_MS >= to.getTime()) continue
      load.set(hour, Math.max(load.get(hour) ?? 0, watts / 1000))
    }
  })
  return load
}

function throughTube(
  { celsius, upKH, holdHours }: Heat,
  segments: Heat['segments'],
  ambientC: number,
  windowHours: number,
): number[] {
  if (celsius <= ambientC) return []
  const rampHours = (celsius - ambientC) / upKH
  const hold = holdHours ?? Math.max(0, windowHours - rampHours)
  return powerByHour(segments, ambientC, { celsius, upKH, holdHours: hold, downKH: null })
}

function blanketsAlone(segments: Heat['segments'], windowHours: number): number[] {
  const watts = segments.reduce((sum, { blanketW }) => sum + blanketW, 0)
  return Array.from({ length: Math.max(0, Math.ceil(windowHours)) }, () => watts)
}

interface Excess {
  hour: number
  kW: number
  capKW: number
  hours: number
}

/** The hour that is furthest above its cap, and how many are above; null when none is. */
function worstHour(
  own: Load,
  others: readonly Load[],
  baseKW: number,
  capAt: (hour: number) => number | null,
  fromMs: number,
): Excess | null {
  let worst: Excess | null = null
  let hours = 0
  for (const [hour, ownKW] of own) {
    const capKW = capAt(hour)
    if (capKW === null || ownKW <= 0 || (hour + 1) * HOUR_MS <= fromMs) continue
    const kW = others.reduce((sum, load) => sum + (load.get(hour) ?? 0), ownKW + baseKW)
    if (kW <= capKW + SLACK_KW) continue
    hours += 1
    if (worst === null || kW - capKW > worst.kW - worst.capKW) worst = { hour, kW, capKW, hours }
  }
  return worst === null ? null : { ...worst, hours }
}

/** K5: sets that two permits want, and hours above a cap. */
export function powerOverCap(facts: ConflictFacts): Finding[] {
  const { own, limits, zone } = facts
  const left = ahead(facts)
  if (own.heat === null || left === null) return sameSupply(facts)
  const others = permitsAtOnce(facts)
  const fromMs = left.from.getTime()
  const byDay = (hour: number) => {
    const siteHour = siteMoment(hour * HOUR_MS, zone).minuteOfDay / 60
    return siteHour >= DAY_FROM_HOUR && siteHour < DAY_TO_HOUR
  }
  const sum = (feeder: Feeder | null) => {
    const capAt = (hour: number) =>
      feeder !== null ? limits.feederKW[feeder] : byDay(hour) ? limits.dayKW : limits.nightKW
    const loads = others.map((other) => loadOf(other, facts.ambientC, feeder))
    const mine = loadOf(own, facts.ambientC, feeder)
    const excess = worstHour(mine, loads, feeder === null ? limits.baseKW : 0, capAt, fromMs)
    return excess === null ? [] : [overCap(facts, others, feeder, excess, byDay(excess.hour))]
  }
  const unknown = limits.dayKW === null || limits.nightKW === null
  return [
    ...sameSupply(facts),
    ...(unknown ? [noCap()] : []),
    ...[null, ...FEEDERS].flatMap((feeder) => sum(feeder)),
  ]
}

function overCap(
  { own, limits, ambientC, zone }: ConflictFacts,
  others: readonly ConflictPermit[],
  feeder: Feeder | null,
  { hour, kW, capKW, hours }: Excess,
  byDay: boolean,
): Finding {
  const parts = [own, ...others].flatMap((permit) => {
    const part = loadOf(permit, ambientC, feeder).get(hour) ?? 0
    return part === 0 ? [] : [`${permit === own ? 'this permit' : permit.number} ${part.toFixed(1)} kW`]
  })
  if (feeder === null && limits.baseKW > 0) parts.push(`base load ${limits.baseKW.toFixed(0)} kW`)
  const cap = feeder === null ? `the site's cap ${byDay ? 'by day' : 'by night'}` : `feeder ${feeder}`
  const assumed = [own, ...others].some(({ heat }) => heat !== null && heat.startsAt === null)
  return {
    key: feeder === null ? 'K5:site' : `K5:feeder:${feeder}`,
    rule: 'K5',
    effect: 'block',
    text: `${kW.toFixed(0)} kW on ${cap}, which carries ${capKW.toFixed(0)} kW, in the hour from ${instantText(new Date(hour * HOUR_MS), zone)}: ${parts.join(', ')}. ${hours === 1 ? 'One hour of this permit is' : `${hours} hours of this permit are`} above it${assumed ? '; where no plan says when heating begins, it is taken to begin with the window' : ''}.`,
    wayOut: 'Stagger the ramps, lower the rate or the temperature, or move one of the windows.',
    place: null,
  }
}

function noCap(): Finding {
  return {
    key: 'K5:no-cap',
    rule: 'K5',
    effect: 'warning',
    text: 'The register has no power cap for the day or for the night, so the power of all permits at once cannot be held against it.',
    wayOut: 'An engineer enters the caps under Register, Limits.',
    place: null,
  }
}
