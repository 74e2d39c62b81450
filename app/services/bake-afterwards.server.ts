/**
 * What a bake left behind: pressure before and after at the same gauge, the outgassing that explains what it reads now,
 * and how the plan was kept. The fitted figure is offered; an engineer makes it the register's.
 */
import type { Db } from '../db/client.server.ts'
import {
  binReadings,
  factorAt,
  listFittingSpans,
  listMapSpans,
  listPositions,
} from '../db/queries/readings.server.ts'
import { listPlacedPumps, type SegmentWithState } from '../db/queries/segments.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import type { FoundBake } from '../domain/bake-history.ts'
import { DomainError } from '../domain/errors.ts'
import { steadyProfile } from '../physics/predict.ts'
import { type BakeTerms, findBake, planOf, termsOf } from './bake-run-data.server.ts'
import { editThing } from './register-edit.server.ts'
import { readRegisterDetail } from './register-page.server.ts'
import { coldModel } from './segment-model.server.ts'
import { getSite, instantWriter } from './site.server.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS
/** Length of the stretches that are compared. */
const COMPARED_MS = DAY_MS
/** A cold tube on its own pump settles for some days before its pressure says what the steel gives. */
const SETTLES_MS = 3 * DAY_MS
const LEAST_HOURS = 12
/** A hot-cathode gauge knows its own sensitivity no better than this (common practice, no source). */
const GAUGE_SHARE = 0.15

export interface Settled {
  pa: number
  /** Relative scatter of the hourly means. */
  scatter: number
  from: Date
  to: Date
}

export interface BakeAfterwards {
  gauge: string
  before: Settled | null
  after: Settled | null
  /** Before over after; null without both. */
  improvement: number | null
  /** Why nothing can be offered; empty when `offer` stands. */
  noOffer: string
  offer: {
    field: 'hydrogenC0' | 'hydrogenQ20'
    unit: string
    held: number
    fitted: number
    /** One standard deviation, of gauge and scatter together. */
    error: number
  } | null
  /** Segment entry's revision, so that an offer is not accepted over somebody's edit. */
  revision: number
  plan: { name: string; planned: string; actual: string }[]
}

/** Null while the bake is not over. */
export async function readAfterwards(
  db: Db,
  segment: SegmentWithState,
  bake: FoundBake,
  terms: BakeTerms | null,
  ambientC: number,
  now: Date,
): Promise<BakeAfterwards | null> {
  const { coldFrom } = bake
  if (bake.phase !== 'over' || coldFrom === null) return null
  const gauge = await crossGauge(db, segment.id)
  if (gauge === null) return null
  const began = bake.prepFrom ?? bake.heatingFrom
  const settledFrom = new Date(coldFrom.getTime() + SETTLES_MS)
  const [before, after] = await Promise.all([
    settled(db, gauge.id, new Date(began.getTime() - COMPARED_MS), began),
    settled(
      db,
      gauge.id,
      settledFrom,
      new Date(Math.min(now.getTime(), settledFrom.getTime() + COMPARED_MS)),
    ),
  ])
  const offered = await offerFor(db, segment, bake, gauge, after)
  return {
    gauge: gauge.tag,
    before,
    after,
    improvement: before === null || after === null ? null : before.pa / after.pa,
    ...offered,
    revision: segment.revision,
    plan: planAgainstActual(bake, terms, ambientC),
  }
}

async function crossGauge(db: Db, segmentId: number) {
  const hot = await listPositions(db, { segmentId, kinds: ['hot-cathode'] })
  return hot.find(({ tag }) => tag.endsWith('B')) ?? hot[0] ?? null
}

/** Geometric mean of the hourly means of a gauge; null with fewer than twelve hours of data. */
async function settled(db: Db, positionId: number, from: Date, to: Date): Promise<Settled | null> {
  if (to.getTime() - from.getTime() < LEAST_HOURS * HOUR_MS) return null
  const [spans, fittings] = await Promise.all([
    listMapSpans(db, [positionId], from, to),
    listFittingSpans(db, [positionId]),
  ])
  const logs: number[] = []
  for (const span of spans) {
    const bins = await binReadings(db, {
      channelIds: [span.channelId],
      from: span.from > from ? span.from : from,
      to: span.to !== null && span.to < to ? span.to : to,
      binSeconds: 3600,
      logarithmic: true,
    })
    for (const bin of bins) logs.push(Math.log(bin.mean * factorAt(fittings, positionId, new Date(bin.atMs))))
  }
  if (logs.length < LEAST_HOURS) return null
  const mean = logs.reduce((sum, one) => sum + one, 0) / logs.length
  const variance = logs.reduce((sum, one) => sum + (one - mean) ** 2, 0) / (logs.length - 1)
  return { pa: Math.exp(mean), scatter: Math.sqrt(variance), from, to }
}

async function offerFor(
  db: Db,
  segment: SegmentWithState,
  bake: FoundBake,
  gauge: { tag: string; chainageM: number | null },
  after: Settled | null,
): Promise<Pick<BakeAfterwards, 'offer' | 'noOffer'>> {
  const no = (noOffer: string) => ({ offer: null, noOffer })
  if (bake.soakFrom === null) return no('The bake was broken off before its soak.')
  if (after === null) {
    return no(
      `${gauge.tag} has too few readings in the day that begins three days after the tube was cold: at least twelve hours are wanted.`,
    )
  }
  const pumps = await listPlacedPumps(db, [segment.id], after.to)
  const model = coldModel(segment, pumps)
  if (model === null) return no('The register lacks what the model of this segment needs: pumps or hydrogen.')
  if (model.water.state === 'unbaked') {
    return no('The register still calls this segment never baked: enter the year of the bake first.')
  }
  const atM = (gauge.chainageM ?? segment.startM) - segment.startM
  const expected = nearest(steadyProfile(model), atM)
  const times = after.pa / expected
  const field = model.hydrogen.kind === 'diffusion' ? ('hydrogenC0' as const) : ('hydrogenQ20' as const)
  const held = model.hydrogen.kind === 'diffusion' ? model.hydrogen.c0PerM3 : model.hydrogen.qPaMS
  const fitted = held * times
  return {
    noOffer: '',
    offer: {
      field,
      unit: field === 'hydrogenC0' ? 'atoms/m³' : 'Pa·m/s at 20 °C',
      held,
      fitted,
      error: fitted * Math.hypot(GAUGE_SHARE, after.scatter),
    },
  }
}

function nearest(profile: readonly { offsetM: number; n2EquivalentPa: number }[], atM: number): number {
  let best = profile[0]
  for (const point of profile) {
    if (best === undefined || Math.abs(point.offsetM - atM) < Math.abs(best.offsetM - atM)) best = point
  }
  if (best === undefined) throw new RangeError('a profile without points')
  return best.n2EquivalentPa
}

function planAgainstActual(
  bake: FoundBake,
  terms: BakeTerms | null,
  ambientC: number,
): BakeAfterwards['plan'] {
  if (terms === null) return []
  const hours = (from: Date | null, to: Date | null) =>
    from === null || to === null ? 'none' : `${((to.getTime() - from.getTime()) / HOUR_MS).toFixed(1)} h`
  const rampEnd = bake.soakFrom ?? bake.coolingFrom
  return [
    {
      name: 'Ramp',
      planned: `${((terms.setpointC - ambientC) / terms.upKH).toFixed(1)} h at ${terms.upKH} °C/h to ${terms.setpointC} °C`,
      actual: hours(bake.heatingFrom, rampEnd),
    },
    {
      name: 'Soak',
      planned: `${terms.soakHours.toFixed(0)} h`,
      actual: hours(bake.soakFrom, bake.coolingFrom),
    },
    { name: 'Cooling', planned: '–', actual: hours(bake.coolingFrom, bake.coldFrom) },
  ]
}

/**
 * Makes the fitted figure the register's, with where it comes from.
 *
 * @param revision of the segment's entry that the offer was made for
 * @throws DomainError forbidden, not-found, bad-input (nothing to accept), conflict (the entry was edited meanwhile)
 */
export async function acceptOutgassing(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  since: number | null,
  revision: number,
): Promise<void> {
  demand(actor, 'register:edit')
  const { segment, bake } = await findBake(db, tag, now, since)
  const plan = await planOf(db, segment.id, bake)
  const terms = await termsOf(db, segment.id, plan, bake.heatingFrom)
  const { ambientC } = await getSite(db)
  const found = await readAfterwards(db, segment, bake, terms, ambientC, now)
  if (found === null || found.offer === null) {
    throw new DomainError(
      'bad-input',
      `There is no figure to take over from this bake. ${found?.noOffer ?? 'It is not over yet.'}`,
    )
  }
  const { offer, gauge } = found
  const detail = await readRegisterDetail(db, 'segments', tag, now)
  const write = await instantWriter(db)
  const values = detail.values
  if (values === null) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  await editThing(db, actor, now, 'segments', tag, {
    tag: '',
    revision,
    validFrom: now,
    reason: `Fitted after the bake that began ${write(bake.heatingFrom)}`,
    values: {
      ...values,
      [offer.field]: Number(offer.fitted.toPrecision(3)),
      hydrogenOrigin: `Measured: ${gauge} three days after the bake of ${write(bake.heatingFrom)}, ± ${Math.round((100 * offer.error) / offer.fitted)} %`,
    },
  })
}
