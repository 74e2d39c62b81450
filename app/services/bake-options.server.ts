/** Bake options of a segment or a pair: the register and the log, put to the pure comparison. Nothing is kept. */
import { setImmediate } from 'node:timers/promises'
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listSupplies, listValvesOf } from '../db/queries/bake-plans.server.ts'
import { type LimitRow, listLimits, listSegmentTags } from '../db/queries/segments.server.ts'
import { type BakeOptions, bakeOptionSteps } from '../domain/bake-options.ts'
import type { OptionPart, OptionSite } from '../domain/bake-options-demands.ts'
import type { OptionsQuery } from '../domain/bake-options-query.ts'
import {
  COOLEST_C,
  HOTTEST_C,
  type OptionQuestion,
  type OptionSegment,
} from '../domain/bake-options-question.ts'
import type { PlannedSegment } from '../domain/bake-plan-prediction.ts'
import { FEEDERS, type LimitKind, type PositionKind, VALVE_KIND_LABELS } from '../domain/register.ts'
import { SEGMENT_STATES } from '../domain/segment-states.ts'
import { type BakedPart, PART_LIMITS } from '../physics/component-limits.ts'
import { airPressure, unitPressure } from '../physics/segment-gas.ts'
import { plannedSegments } from './bake-plans-facts.server.ts'
import { hydrogenExcess, scaleHydrogen } from './segment-model.server.ts'
import { crossOf } from './segment-page.server.ts'
import { getSite } from './site.server.ts'
import { limitFor, readStandings, type StandingSegment } from './standing.server.ts'

/** Site values that options fall back on where the register has no limit of the kind (own choice). */
const FALLBACK = { rampKH: 10, touchC: 40, toleranceK: 10 }

/** Limits of gauge heads, which come off or are protected for a hotter bake. */
const HEADS: Partial<Record<PositionKind, { kind: BakedPart; words: string }>> = {
  'hot-cathode': { kind: 'hot-cathode-head', words: 'hot-cathode head' },
  'cold-cathode': { kind: 'cold-cathode-head', words: 'cold-cathode head' },
  'thermal-conductivity': { kind: 'thermal-gauge-head', words: 'thermal-conductivity head' },
}

export interface BakeOptionsPage {
  tags: string[]
  query: OptionsQuery
  /** What the answer was worked out for; null before anything was asked. */
  asked: {
    segments: string[]
    targetPa: number
    /** The target in force, where none was typed. */
    targetFromRegister: boolean
    gauges: { segment: string; gauge: string }[]
    upKH: number
    ambientC: number
    coldC: number
    /** Segments whose hydrogen was scaled to their present reading, and by how much. */
    excess: { segment: string; times: number }[]
    /** Segments that are hot at the moment. */
    hot: string[]
  } | null
  answer: BakeOptions | null
}

/** Answers the question in the address. Takes a breath after every full solution, so that other requests are served. */
export async function readBakeOptions(db: Db, query: OptionsQuery, now: Date): Promise<BakeOptionsPage> {
  const tags = await listSegmentTags(db)
  const page = { tags, query, asked: null, answer: null }
  if (query.segments.length === 0) return page
  const wrong = wrongTags(query.segments, tags)
  if (wrong !== null) return { ...page, answer: refused(wrong) }
  const read = await readQuestion(db, query, now)
  if ('refusal' in read) return { ...page, answer: refused(read.refusal) }
  const { question, asked } = read
  const steps = bakeOptionSteps(question)
  let step = steps.next()
  while (!step.done) {
    await setImmediate()
    step = steps.next()
  }
  return { tags, query, asked, answer: step.value }
}

function refused(refusal: string): BakeOptions {
  return { refusal, rows: [], left: [] }
}

function wrongTags(asked: readonly string[], tags: readonly string[]): string | null {
  const unknown = asked.find((tag) => !tags.includes(tag))
  if (unknown !== undefined)
    return `The register has no segment “${unknown.slice(0, 20)}”. Write tags as they stand there, such as ${tags[0] ?? 'SG-01'}.`
  if (new Set(asked).size < asked.length) return `${asked[0]} is named twice; a pair takes two segments.`
  if (asked.length > 2)
    return `Found ${asked.length} segments; a supply set heats one, or two in series. Name one or two.`
  return null
}

async function readQuestion(
  db: DbOrTx,
  query: OptionsQuery,
  now: Date,
): Promise<{ question: OptionQuestion; asked: NonNullable<BakeOptionsPage['asked']> } | { refusal: string }> {
  const standings = (await Promise.all(query.segments.map((tag) => readStandings(db, now, tag)))).flat()
  const [limits, site] = await Promise.all([listLimits(db, now), getSite(db)])
  const registered = standings.map(({ target }) => target?.value ?? null)
  // A pair must meet the lower of the two targets.
  const lowest = Math.min(...registered.map((value) => value ?? Number.POSITIVE_INFINITY))
  const targetPa = query.targetPa ?? lowest
  if (!Number.isFinite(targetPa)) {
    return {
      refusal:
        'The register has no target in service for this segment. Enter one there, or type a target here.',
    }
  }
  const planned = await plannedSegments(
    db,
    { cart: null, startsAt: null, prepHours: 0 },
    standings.map(({ segment }) => segment),
    now,
  )
  const segments: OptionSegment[] = []
  const excess: NonNullable<BakeOptionsPage['asked']>['excess'] = []
  for (const [i, standing] of standings.entries()) {
    const found = await optionSegment(db, standing, planned[i], query.leakPaM3S)
    if (found === null) {
      return {
        refusal: `The register lacks what the model of ${standing.segment.tag} needs: the hydrogen of its steel, or a cart and a pump with speeds for hydrogen, and for water where it was never baked. Enter them under Register.`,
      }
    }
    segments.push(found.segment)
    if (found.times > 1) excess.push({ segment: standing.segment.tag, times: found.times })
  }
  const optionSite = await readSite(db, limits, site.ambientC, query.upKH)
  return {
    question: { segments, site: optionSite, targetPa, coolestC: COOLEST_C, hottestC: HOTTEST_C },
    asked: {
      segments: query.segments,
      targetPa,
      targetFromRegister: query.targetPa === null,
      gauges: segments.map(({ baked, gauge }) => ({ segment: baked.tag, gauge: gauge.tag })),
      upKH: optionSite.upKH,
      ambientC: site.ambientC,
      coldC: optionSite.coldC,
      excess,
      hot: standings.flatMap(({ segment }) => (SEGMENT_STATES[segment.state].hot ? [segment.tag] : [])),
    },
  }
}

/** How many times the hydrogen of the model a segment reads at its cross, what its air leaks give taken off. */
function excessOf(standing: StandingSegment, model: NonNullable<PlannedSegment['hot']>): number {
  const cross = crossOf(standing)
  const airPa = airPressure(model, model.pumps[0]?.atM ?? 0)
  return hydrogenExcess(model, cross === null ? null : Math.max(0, cross - airPa))
}

/**
 * Segments in service that read more than the register's hydrogen explains, and by how much. Those on their way down
 * still show their water and are left out.
 */
export async function readExcess(
  db: DbOrTx,
  tags: readonly string[],
  now: Date,
): Promise<{ segment: string; times: number }[]> {
  const standings = (await Promise.all(tags.map((tag) => readStandings(db, now, tag)))).flat()
  const settled = standings.filter(({ segment }) => segment.state === 'in-service')
  const planned = await plannedSegments(
    db,
    { cart: null, startsAt: null, prepHours: 0 },
    settled.map(({ segment }) => segment),
    now,
  )
  return settled.flatMap((standing, i) => {
    const model = planned[i]?.after ?? planned[i]?.hot ?? null
    const times = model === null ? 1 : excessOf(standing, model)
    return times > 1 ? [{ segment: standing.segment.tag, times }] : []
  })
}

async function optionSegment(
  db: DbOrTx,
  standing: StandingSegment,
  planned: PlannedSegment | undefined,
  leakPaM3S: number,
): Promise<{ segment: OptionSegment; times: number } | null> {
  if (planned === undefined || planned.hot === null) return null
  const { baked, hot: onCart, after, coldHours } = planned
  const later = after ?? onCart
  // Where the leak lies is not known: it is taken at the end, where it counts for most.
  const leaks = leakPaM3S > 0 ? { airLeaks: [{ atM: 0, qPaM3S: leakPaM3S }] } : {}
  const times = excessOf(standing, { ...later, ...leaks })
  const hot = { ...onCart, hydrogen: scaleHydrogen(onCart.hydrogen, times), ...leaks }
  const { segment, gauges } = standing
  const places = gauges
    .filter(({ position }) => position.kind === 'hot-cathode')
    .map(({ position, standing: { offsetM } }) => ({ tag: position.tag, offsetM }))
  const worst = places.toSorted(
    (a, b) => unitPressure(later, 'H2', b.offsetM) - unitPressure(later, 'H2', a.offsetM),
  )[0]
  return {
    times,
    segment: {
      baked,
      hot,
      afterPumps: later.pumps,
      gauge: worst ?? { tag: `the west end of ${segment.tag}`, offsetM: 0 },
      coldHours: Math.max(0, coldHours),
      parts: [...(await valveParts(db, segment.id)), ...headParts(gauges)],
      waterAssumed: isAssumed(segment.waterOrigin),
      hydrogenAssumed: isAssumed(segment.hydrogenOrigin),
    },
  }
}

/** The register says in words where a value comes from; an assumed one says so first. */
function isAssumed(origin: string): boolean {
  return /^\s*assum/i.test(origin)
}

async function valveParts(db: DbOrTx, segmentId: number): Promise<OptionPart[]> {
  return (await listValvesOf(db, [segmentId])).map(({ tag, kind, seal, limitC, partRiseShare }) => ({
    tag,
    words: `${VALVE_KIND_LABELS[kind].toLowerCase()}, ${seal}`,
    limitC,
    riseShare: partRiseShare,
    removable: false,
    provenance: 'register',
  }))
}

function headParts(gauges: StandingSegment['gauges']): OptionPart[] {
  return gauges.flatMap(({ position: { tag, kind } }) => {
    const head = HEADS[kind]
    if (head === undefined) return []
    const { celsius, provenance } = PART_LIMITS[head.kind]
    // Heads stand under the blankets of the cross and the boxes, and get as hot as the tube.
    return [{ tag, words: head.words, limitC: celsius, riseShare: 1, removable: true, provenance }]
  })
}

async function readSite(
  db: DbOrTx,
  limits: readonly LimitRow[],
  ambientC: number,
  upKH: number | null,
): Promise<OptionSite> {
  const value = (kind: LimitKind): number | null => limitFor(limits, kind, null)?.value ?? null
  const [west, east] = FEEDERS
  return {
    ambientC,
    upKH: upKH ?? value('ramp-rate') ?? FALLBACK.rampKH,
    coldC: value('touch-limit') ?? FALLBACK.touchC,
    toleranceK: value('bake-tolerance') ?? FALLBACK.toleranceK,
    supplies: (await listSupplies(db)).map(({ tag, maxAmps, maxVolts }) => ({ tag, maxAmps, maxVolts })),
    caps: {
      dayKW: value('power-cap-day'),
      nightKW: value('power-cap-night'),
      baseKW: value('power-base') ?? 0,
    },
    feeders: { [west]: value(`feeder-${west}`), [east]: value(`feeder-${east}`) } as OptionSite['feeders'],
  }
}
