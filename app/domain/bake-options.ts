/**
 * The choice of a bake for one segment or a pair in series: every temperature of a grid with the soak that the target
 * needs, what that asks of the hardware, and what it leaves behind; and for each temperature left out, why.
 */

import { afterBake } from '../physics/bake.ts'
import { bakeEnergyPerM } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'
import { heatedTube, powerW } from './bake-load.ts'
import { type OutcomeBands, outcomeBands } from './bake-options-bands.ts'
import {
  careFor,
  type Demand,
  demandsAt,
  figure,
  isOver,
  type JointStroke,
  overSentence,
  peakKW,
  strokes,
  supplyDemands,
} from './bake-options-demands.ts'
import { DEFAULT_STEP_C, type OptionQuestion, type OptionSegment } from './bake-options-question.ts'
import { refusalOf } from './bake-options-refusals.ts'
import {
  closedHold,
  closedProgramme,
  confirmSoak,
  freeCoolHours,
  fullOutcome,
  type HeatPath,
  type SolvedOutcome,
  type SolvedSegment,
} from './bake-options-solve.ts'

export interface OptionOutcome extends SolvedOutcome {
  tag: string
  /** Gauge that the figures hold for. */
  gauge: string
  bands: OutcomeBands
}

export interface BakeOptionRow {
  celsius: number
  rampHours: number
  soakHours: number
  /** By itself, down to the touch limit; the slower one of a pair. */
  coolHours: number
  totalHours: number
  energyKWh: number
  soakKW: number
  peakKW: number
  /** At the end of the ramp, on the set that is strained least. */
  supply: { tag: string; amps: number; volts: number }
  strokes: JointStroke[]
  outcomes: OptionOutcome[]
  /** Gas that decides the soak. */
  decides: SolvedOutcome['limitedBy']
  /** The hardware limit that is nearest. */
  tightest: Demand
  cautions: string[]
  /**
   * Soak after which even the upper edge of the band meets the target, by the closed forms; null where a year would
   * not do.
   */
  sureSoakHours: number | null
  /** Full solutions that confirmed the row. */
  solves: number
}

type LeftReason = Demand['kind'] | 'target' | 'unconfirmed' | 'beaten'

export interface LeftOut {
  celsius: number
  reason: LeftReason
  words: string
}

export interface BakeOptions {
  /** Why nothing can be offered at all, and what would lift it; null where there are rows. */
  refusal: string | null
  rows: BakeOptionRow[]
  left: LeftOut[]
}

/** Options at once; see `bakeOptionSteps`. */
export function bakeOptions(question: OptionQuestion, solve: typeof fullOutcome = fullOutcome): BakeOptions {
  const steps = bakeOptionSteps(question, solve)
  let step = steps.next()
  while (!step.done) step = steps.next()
  return step.value
}

/**
 * Options, handed over after every full solution so that a server can answer others in between. Hardware comes first,
 * closed forms screen what it allows, and every row that is left has been confirmed by the full solution.
 *
 * @throws PhysicsError for a segment that cannot be
 */
export function* bakeOptionSteps(
  question: OptionQuestion,
  solve: typeof fullOutcome = fullOutcome,
): Generator<undefined, BakeOptions, undefined> {
  const refused = refusalOf(question)
  if (refused !== null) return { refusal: refused, rows: [], left: [] }
  const solved = question.segments.map((segment) => solvedSegment(segment, question.site.ambientC))
  const left: LeftOut[] = []
  const screened: Screened[] = []
  for (const celsius of grid(question)) {
    const found = screen(question, solved, celsius)
    if ('reason' in found) left.push(found)
    else screened.push(found)
  }
  const rows = yield* confirmedRows(question, solved, screened, left, solve)
  left.sort((a, b) => a.celsius - b.celsius)
  return { refusal: rows.length > 0 ? null : nothingLeft(left), rows, left }
}

/** Confirms what no other option beats; where one is not confirmed, what it had beaten is looked at after all. */
function* confirmedRows(
  question: OptionQuestion,
  solved: readonly SolvedSegment[],
  screened: readonly Screened[],
  left: LeftOut[],
  solve: typeof fullOutcome,
): Generator<undefined, BakeOptionRow[], undefined> {
  const rows = new Map<number, BakeOptionRow>()
  let pool = screened
  for (;;) {
    // A confirmed row is weighed by what came out of it, the others by what the closed forms promise.
    const open = pool.filter(
      (one) => !rows.has(one.celsius) && ![...rows.values()].some((row) => beats(row, one)),
    )
    const next = open.find((one) => !open.some((other) => beats(other, one)))
    if (next === undefined) break
    const { celsius, path } = next
    const confirmed = yield* confirmSoak(solved, path, question.targetPa, solve)
    if (confirmed === null) {
      pool = pool.filter((one) => one !== next)
      left.push({
        celsius,
        reason: 'unconfirmed',
        words: `At ${celsius} °C the full solution does not confirm what the closed forms promise; a hotter bake would.`,
      })
    } else rows.set(celsius, rowOf(question, solved, path, confirmed))
  }
  const found = [...rows.values()]
  for (const one of pool) {
    const better = rows.has(one.celsius) ? undefined : found.find((row) => beats(row, one))
    if (better !== undefined) left.push(beaten(one, better))
  }
  return found.filter((one) => {
    const better = found.find((other) => beats(other, one))
    if (better !== undefined) left.push(beaten(one, better))
    return better === undefined
  })
}

function grid({ coolestC, hottestC, stepC = DEFAULT_STEP_C }: OptionQuestion): number[] {
  return Array.from(
    { length: Math.floor((hottestC - coolestC) / stepC + 1e-9) + 1 },
    (_, i) => coolestC + i * stepC,
  )
}

function solvedSegment(
  { baked, hot, afterPumps, gauge, coldHours }: OptionSegment,
  ambientC: number,
): SolvedSegment {
  return { model: hot, afterPumps, atM: gauge.offsetM, coldHours, tube: heatedTube(baked, ambientC) }
}

interface Screened {
  celsius: number
  path: HeatPath
  totalHours: number
  energyKWh: number
}

function screen(
  question: OptionQuestion,
  solved: readonly SolvedSegment[],
  celsius: number,
): Screened | LeftOut {
  const { site, segments, targetPa } = question
  const over = demandsAt(segments, site, celsius).find(isOver)
  if (over !== undefined) return { celsius, reason: over.kind, words: overSentence(celsius, over) }
  const path = { celsius, ambientC: site.ambientC, upKH: site.upKH, coldC: site.coldC }
  const holds = solved.map((segment) => closedHold(segment, path, targetPa))
  const missing = holds.indexOf(null)
  if (missing >= 0) {
    return {
      celsius,
      reason: 'target',
      words: `At ${celsius} °C a year of soak would not bring ${segments[missing]?.baked.tag} to the target; a hotter bake or a higher target would.`,
    }
  }
  const soakHours = Math.max(...holds.map((hours) => Math.ceil(hours ?? 0)))
  return { celsius, path, ...costs(question, solved, path, soakHours) }
}

/** Hours and energy of a bake: ramp, soak, and cooling by itself; the blankets heat as long as the tube does. */
function costs(
  { segments, site }: OptionQuestion,
  solved: readonly SolvedSegment[],
  path: HeatPath,
  soakHours: number,
) {
  const rampHours = (path.celsius - site.ambientC) / site.upKH
  const coolHours = Math.max(...solved.map(({ tube }) => freeCoolHours(tube, path)))
  const ramp = {
    fromK: celsiusToKelvin(site.ambientC),
    toK: celsiusToKelvin(path.celsius),
    rateKS: site.upKH / 3600,
    holdSeconds: soakHours * 3600,
  }
  const energyKWh = segments.reduce((sum, { baked }) => {
    const tubeJ = bakeEnergyPerM(heatedTube(baked, site.ambientC), ramp) * (baked.endM - baked.startM)
    return sum + tubeJ / 3.6e6 + (baked.blanketW / 1000) * (rampHours + soakHours)
  }, 0)
  return { rampHours, soakHours, coolHours, totalHours: rampHours + soakHours + coolHours, energyKWh }
}

/** An option named apart, with what makes it needless. A cooler bake is kinder to every part. */
function beaten(one: Weighed, by: Weighed): LeftOut {
  return {
    celsius: one.celsius,
    reason: 'beaten',
    words: `${by.celsius} °C gets there in ${hoursText(by.totalHours)} with ${energyText(by.energyKWh)}; ${one.celsius} °C would take ${hoursText(one.totalHours)} and ${energyText(one.energyKWh)}.`,
  }
}

interface Weighed {
  celsius: number
  totalHours: number
  energyKWh: number
}

function beats(one: Weighed, other: Weighed): boolean {
  const noWorse =
    one.celsius <= other.celsius && one.totalHours <= other.totalHours && one.energyKWh <= other.energyKWh
  const better =
    one.celsius < other.celsius || one.totalHours < other.totalHours || one.energyKWh < other.energyKWh
  return noWorse && better
}

function rowOf(
  question: OptionQuestion,
  solved: readonly SolvedSegment[],
  path: HeatPath,
  { soakHours, outcomes, solves }: { soakHours: number; outcomes: SolvedOutcome[]; solves: number },
): BakeOptionRow {
  const { segments, site } = question
  const { celsius } = path
  const supply = supplyDemands(segments, site, celsius)
  const [tightest] = demandsAt(segments, site, celsius)
  if (supply === null || tightest === undefined)
    throw new RangeError('a bake without a supply set was let through')
  const worst = outcomes.reduce((a, b) => (b.n2EquivalentPa > a.n2EquivalentPa ? b : a))
  return {
    celsius,
    ...costs(question, solved, path, soakHours),
    soakKW: segments.reduce(
      (sum, { baked }) => sum + powerW(baked, site.ambientC, celsius, 0).totalW / 1000,
      0,
    ),
    peakKW: peakKW(segments, site, celsius),
    supply: { tag: supply.tag, amps: supply.amps, volts: supply.volts },
    strokes: strokes(segments, site.ambientC, celsius),
    outcomes: outcomes.map((outcome, i) => withBands(question, solved, path, soakHours, outcome, i)),
    decides: worst.limitedBy,
    tightest,
    cautions: cautionsOf(question, celsius),
    sureSoakHours: sureSoak(question, solved, path, soakHours),
    solves,
  }
}

function withBands(
  { segments, site }: OptionQuestion,
  solved: readonly SolvedSegment[],
  path: HeatPath,
  soakHours: number,
  outcome: SolvedOutcome,
  index: number,
): OptionOutcome {
  const segment = segments[index]
  const own = solved[index]
  if (segment === undefined || own === undefined) throw new RangeError(`no segment ${index} in the question`)
  const { waterAssumed, hydrogenAssumed } = segment
  const bands = outcomeBands(own.model, closedProgramme(own, path, soakHours), own.atM, outcome, {
    waterAssumed,
    hydrogenAssumed,
    toleranceK: site.toleranceK,
  })
  return { ...outcome, tag: segment.baked.tag, gauge: segment.gauge.tag, bands }
}

/** The longest soak that is looked at, h: nobody bakes for longer than a year. */
const LONGEST_SOAK_H = 8766

function sureSoak(
  { segments, site, targetPa }: OptionQuestion,
  solved: readonly SolvedSegment[],
  path: HeatPath,
  soakHours: number,
): number | null {
  const meets = (hours: number): boolean =>
    solved.every((own, i) => {
      const programme = closedProgramme(own, path, hours)
      const { waterAssumed = true, hydrogenAssumed = true } = segments[i] ?? {}
      const knowledge = { waterAssumed, hydrogenAssumed, toleranceK: site.toleranceK }
      const outcome = afterBake(own.model, programme, own.atM)
      return outcomeBands(own.model, programme, own.atM, outcome, knowledge).n2.highPa <= targetPa
    })
  if (meets(soakHours)) return soakHours
  if (!meets(LONGEST_SOAK_H)) return null
  let low = Math.log(Math.max(soakHours, 0.5))
  let high = Math.log(LONGEST_SOAK_H)
  // To within half an hour or one per cent, whichever is more.
  while (high - low > 0.01 && Math.exp(high) - Math.exp(low) > 0.5) {
    const middle = (low + high) / 2
    if (meets(Math.exp(middle))) high = middle
    else low = middle
  }
  return Math.ceil(Math.exp(high))
}

/** A bellows this far out has little left for what nobody foresaw. */
const STROKE_CAUTION = 0.9

function cautionsOf({ segments, site }: OptionQuestion, celsius: number): string[] {
  const found: string[] = []
  const { dayKW, baseKW } = site.caps
  const kW = peakKW(segments, site, celsius) + baseKW
  if (dayKW !== null && kW > dayKW) {
    found.push(
      `The end of the ramp takes ${figure(kW, 'kW')} with the base load: above the cap by day (${figure(dayKW, 'kW')}), so only by night.`,
    )
  }
  for (const { tag, mm, ratedMm } of strokes(segments, site.ambientC, celsius)) {
    if (mm > STROKE_CAUTION * ratedMm && mm <= ratedMm)
      found.push(
        `The bellows of ${tag} use ${figure(mm, 'mm')} of the ${figure(ratedMm, 'mm')} they are rated for.`,
      )
  }
  const care = careFor(segments, site.ambientC, celsius)
  if (care.length > 0) {
    found.push(
      `Take off or protect: ${care.map(({ part }) => `${part.tag} (${part.words}, ${part.limitC} °C, ${part.provenance})`).join('; ')}.`,
    )
  }
  return found
}

/** What stands in the way where no temperature is left: the reasons at the coolest and hottest end differ, and are both said. */
function nothingLeft(left: readonly LeftOut[]): string {
  const words = [...new Set([left[0]?.words, left.at(-1)?.words])].filter((one) => one !== undefined)
  return `No bake reaches the target within the limits. ${words.join(' ')}`
}

/** Hours in words: days beside them where they are many. */
export function hoursText(hours: number): string {
  return hours < 72 ? `${Math.round(hours)} h` : `${Math.round(hours)} h (${(hours / 24).toFixed(1)} days)`
}

/** Energy in words. */
export function energyText(kWh: number): string {
  return kWh < 1000 ? `${Math.round(kWh)} kWh` : `${(kWh / 1000).toFixed(2)} MWh`
}
