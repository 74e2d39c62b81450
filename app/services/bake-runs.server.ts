/** A bake as it runs, or as it ran: what the page shows, the deviations people note, and those the product notes itself. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { type DeviationRow, findPositionIds, listDeviations } from '../db/queries/bake-runs.server.ts'
import { lastReadings, listMapSpans } from '../db/queries/readings.server.ts'
import type { SegmentWithState } from '../db/queries/segments.server.ts'
import { hoursBelowBand } from '../domain/bake-deviations.ts'
import type { FoundBake } from '../domain/bake-history.ts'
import { heatedTube } from '../domain/bake-load.ts'
import {
  type Advice,
  adviceFor,
  type Cooling,
  coolingOf,
  dayOf,
  meterEnergy,
  type ProjectedEnd,
  rampEnd,
  rampRate,
  type SkylinePoint,
  skylineOf,
  soakEnd,
  spreadOf,
  supplyEnergy,
  worstTwo,
} from '../domain/bake-run.ts'
import { bucketStart, ROLLUP_LEVELS } from '../domain/rollups.ts'
import { thermalTime } from '../physics/thermal.ts'
import { type BakeAfterwards, readAfterwards } from './bake-afterwards.server.ts'
import {
  type BakeRunPlan,
  type BakeSeries,
  type BakeTerms,
  findBake,
  pascalText,
  plannedCourse,
  planOf,
  readBakeSeries,
  readThermocouples,
  termsOf,
} from './bake-run-data.server.ts'
import { getSite } from './site.server.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS
const BASE_STEP_S = ROLLUP_LEVELS[0]
/** About as many steps as a picture has room for. */
const STEPS = 360
/** Days of the test after a bake that its picture shows. */
const AFTER_DAYS = 1
/** Three of the five-minute files and five minutes: a thermocouple silent for longer is not watching. */
const STALE_AFTER_MINUTES = 20
const RATE_STEP_S = 300
const CELSIUS_0_K = 273.15

export interface BakeRun {
  segment: SegmentWithState
  bakes: FoundBake[]
  bake: FoundBake
  plan: BakeRunPlan | null
  terms: BakeTerms | null
  ambientC: number
  setpointC: number | null
  points: SkylinePoint[]
  spread: ReturnType<typeof spreadOf>
  worst: ReturnType<typeof worstTwo>
  rateKH: number | null
  advice: Advice[]
  /** Day of the soak; null outside it. */
  day: { day: number; of: number } | null
  end: ProjectedEnd | null
  cooling: Cooling | null
  pressurePa: number | null
  series: BakeSeries
  /** Planned setpoint at each step of the series; null outside the heating. */
  setpoints: (number | null)[]
  supplyNow: { tag: string; volts: number | null; amps: number | null; at: Date | null } | null
  energy: { kWh: number; missingHours: number } | null
  feeder: { tag: string; kWh: number | null } | null
  deviations: DeviationRow[]
  /** Gauge whose pressure is shown. */
  gauge: string
}

/** The bake and, once it is over, what it left behind. */
export async function readBakeRunPage(
  db: Db,
  tag: string,
  now: Date,
  since: number | null,
): Promise<BakeRun & { afterwards: BakeAfterwards | null }> {
  const run = await readBakeRun(db, tag, now, since)
  return {
    ...run,
    afterwards: await readAfterwards(db, run.segment, run.bake, run.terms, run.ambientC, now),
  }
}

/**
 * A bake of a segment: the newest, or the one that began heating at `since`.
 *
 * @param since instant in ms UTC, as the links of the page give it; null for the newest bake
 * @throws DomainError not-found (no such segment, or it was never baked in what is recorded)
 */
async function readBakeRun(db: Db, tag: string, now: Date, since: number | null): Promise<BakeRun> {
  const { segment, bakes, bake } = await findBake(db, tag, now, since)
  const until = endOfPicture(bake, now)
  const [{ ambientC }, plan] = await Promise.all([getSite(db), planOf(db, segment.id, bake)])
  const terms = await termsOf(db, segment.id, plan, bake.heatingFrom)
  const supply = plan?.content.supply ?? null
  const window = pictureWindow(bake, until)
  const live = bake.phase !== 'over'
  const [series, couples, deviations, supplyNow, feeder, recent] = await Promise.all([
    readBakeSeries(db, segment, window, supply),
    live ? readThermocouples(db, segment.id, now) : Promise.resolve([]),
    listDeviations(db, segment.id, bake.prepFrom ?? bake.heatingFrom, new Date(until.getTime() + 1)),
    live && supply !== null ? readSupply(db, supply, now) : Promise.resolve(null),
    readFeeder(db, segment, bake, until),
    live
      ? readBakeSeries(
          db,
          segment,
          { from: new Date(now.getTime() - HOUR_MS), to: now, stepSeconds: RATE_STEP_S },
          null,
        )
      : Promise.resolve(null),
  ])
  const points = skylineOf(couples, now.getTime(), STALE_AFTER_MINUTES)
  const course = terms === null ? null : plannedCourse(bake, terms, ambientC)
  const setpointC = live && course !== null ? course.setpointC(now.getTime()) : null
  const rateKH =
    recent === null
      ? null
      : rampRate(
          recent.steps.map(({ at, medianC }) => ({ at, celsius: medianC })),
          recent.steps.findLast(({ medianC }) => medianC !== null)?.at ?? now.getTime(),
        )
  const pressurePa = series.steps.findLast((step) => step.pressurePa !== null)?.pressurePa ?? null
  const spread = spreadOf(points)
  return {
    segment,
    bakes,
    bake,
    plan,
    terms,
    ambientC,
    setpointC,
    points,
    spread,
    worst: setpointC === null ? [] : worstTwo(points, setpointC),
    rateKH,
    advice:
      terms === null || setpointC === null || (bake.phase !== 'heating' && bake.phase !== 'soak')
        ? []
        : adviceFor({
            phase: bake.phase,
            points,
            setpointC,
            rateKH,
            pressurePa,
            limits: terms,
            pressureText: pascalText,
          }),
    day:
      terms !== null && bake.phase === 'soak' && bake.soakFrom !== null
        ? dayOf(bake.soakFrom.getTime(), now.getTime(), terms.soakHours)
        : null,
    end: projectedEnd(bake, terms, now, spread?.medianC ?? null, rateKH, series),
    cooling:
      bake.phase !== 'cooling' || terms?.touchC == null
        ? null
        : coolingOf(points, now.getTime(), {
            ambientC,
            touchC: terms.touchC,
            tauHours: thermalTime(heatedTube(segment, ambientC), 80 + CELSIUS_0_K) / 3600,
          }),
    pressurePa,
    series,
    setpoints: series.steps.map(({ at }) => course?.setpointC(at) ?? null),
    supplyNow,
    energy: supply === null ? null : supplyEnergy(series.supply, (3 * series.stepSeconds) / 60),
    feeder,
    deviations,
    gauge: series.gauge,
  }
}

function endOfPicture({ coldFrom }: FoundBake, now: Date): Date {
  if (coldFrom === null) return now
  return new Date(Math.min(now.getTime(), coldFrom.getTime() + AFTER_DAYS * DAY_MS))
}

/** The stretch of the picture in whole steps of the rollups. */
function pictureWindow(bake: FoundBake, until: Date): { from: Date; to: Date; stepSeconds: number } {
  const lead = 6 * HOUR_MS
  const start = bake.heatingFrom.getTime() - lead
  const hours = (until.getTime() - start) / HOUR_MS
  const stepSeconds = Math.max(1, Math.ceil((hours * 3600) / STEPS / BASE_STEP_S)) * BASE_STEP_S
  return { from: new Date(bucketStart(start, BASE_STEP_S)), to: new Date(until.getTime() + 1), stepSeconds }
}

function projectedEnd(
  bake: FoundBake,
  terms: BakeTerms | null,
  now: Date,
  medianC: number | null,
  rateKH: number | null,
  series: BakeSeries,
): ProjectedEnd | null {
  if (terms === null) return null
  if (bake.phase === 'heating') return rampEnd(now.getTime(), medianC, terms.setpointC, rateKH)
  if (bake.phase !== 'soak' || bake.soakFrom === null) return null
  const soakFrom = bake.soakFrom.getTime()
  const lost =
    terms.toleranceC === null ? 0 : hoursBelowBand(series.steps, soakFrom, terms.setpointC - terms.toleranceC)
  return soakEnd(soakFrom, terms.soakHours, lost)
}

async function readSupply(db: DbOrTx, supply: string, now: Date): Promise<BakeRun['supplyNow']> {
  const found = await findPositionIds(db, [`${supply}-U`, `${supply}-I`])
  const spans = await listMapSpans(
    db,
    found.map(({ id }) => id),
    new Date(now.getTime() - DAY_MS),
    new Date(now.getTime() + 1),
  )
  const newest = await lastReadings(
    db,
    spans.map(({ channelId }) => channelId),
    now,
  )
  const newestOf = (suffix: string) => {
    const id = found.find(({ tag }) => tag.endsWith(suffix))?.id
    const span = spans.find(({ positionId }) => positionId === id)
    const any = span === undefined ? null : (newest.get(span.channelId)?.any ?? null)
    // "Off" is a reading too: no current flows. Anything else without a value stays unknown.
    return { value: any === null ? null : any.quality === 'off' ? 0 : any.value, at: any?.at ?? null }
  }
  const volts = newestOf('-U')
  const amps = newestOf('-I')
  return { tag: supply, volts: volts.value, amps: amps.value, at: amps.at ?? volts.at }
}

async function readFeeder(
  db: DbOrTx,
  segment: SegmentWithState,
  bake: FoundBake,
  until: Date,
): Promise<BakeRun['feeder']> {
  if (segment.feeder === null) return null
  const tag = segment.feeder === 'west' ? 'EM-W' : 'EM-E'
  const [meter] = await findPositionIds(db, [tag])
  if (meter === undefined) return null
  const from = bake.heatingFrom
  const to = bake.coolingFrom ?? until
  const [span] = await listMapSpans(db, [meter.id], from, to)
  if (span === undefined) return { tag, kWh: null }
  const hourly = Math.max(1, Math.ceil((to.getTime() - from.getTime()) / (6 * HOUR_MS)))
  const readings = await Promise.all(
    Array.from({ length: hourly + 1 }, (_, index) =>
      lastReadings(
        db,
        [span.channelId],
        new Date(Math.min(to.getTime(), from.getTime() + index * 6 * HOUR_MS)),
      ),
    ),
  )
  const values = readings.map((each) => each.get(span.channelId)?.usable?.value ?? null)
  return { tag, kWh: meterEnergy(values) }
}
