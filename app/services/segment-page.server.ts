/** One segment: what was measured, what the model expects, what follows from the two. */
import type { Db } from '../db/client.server.ts'
import { type Entry, listEntries } from '../db/queries/logbook.server.ts'
import {
  listPlacedPumps,
  listSegments,
  listStates,
  type SegmentWithState,
  type StateSpan,
} from '../db/queries/segments.server.ts'
import { DomainError } from '../domain/errors.ts'
import type { SegmentState } from '../domain/segment-states.ts'
import { type IonCurrent, readIonCurrents } from './ion-currents.server.ts'
import { type IsolationTestRow, isolationTestsOf } from './isolation-tests.server.ts'
import { listPermitBriefs, type PermitBrief } from './permit-register.server.ts'
import { type Curves, readCurves } from './segment-curves.server.ts'
import { forecastPumpDown, type PumpDownForecast } from './segment-forecast.server.ts'
import { type BakeAnswer, bakeToReach, predictedProfile } from './segment-model.server.ts'
import { readStandings, type StandingSegment } from './standing.server.ts'

/** Temperature at which the page says how long a bake would have to be. */
const BAKE_C = 150
const ENTRIES_SHOWN = 8

export interface SegmentPageData {
  segment: SegmentWithState
  /** Every segment in order, for the locator strip and the step to the neighbours. */
  along: { tag: string; lineCode: string; startM: number; endM: number; state: SegmentState }[]
  standing: StandingSegment['standing']
  gauges: StandingSegment['gauges']
  pumps: StandingSegment['pumps']
  target: number | null
  limit: number | null
  predicted: { offsetM: number; pa: number }[] | null
  curves: Curves
  ionCurrents: IonCurrent[]
  forecast: PumpDownForecast | null
  bake: { bakeC: number; targetPa: number; answer: BakeAnswer | null } | null
  entries: Entry[]
  states: StateSpan[]
  isolationTests: IsolationTestRow[]
  permits: PermitBrief[]
}

/**
 * Everything the page of a segment shows at an instant.
 *
 * @param ask the pressure, in Pa, that the reader wants a forecast for; null for the page's own choice
 * @throws DomainError not-found
 */
export async function readSegmentPage(
  db: Db,
  tag: string,
  now: Date,
  ask: number | null,
): Promise<SegmentPageData> {
  const standings = await readStandings(db, now, tag)
  const own = standings[0]
  if (own === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const { segment } = own
  const [all, everPlaced, entries, states, curves, isolationTests, ionCurrents, permits] = await Promise.all([
    listSegments(db, now),
    listPlacedPumps(db, [segment.id]),
    listEntries(db, { segmentId: segment.id, limit: ENTRIES_SHOWN }),
    listStates(db, segment.id),
    readCurves(db, own, now),
    isolationTestsOf(db, segment.id),
    readIonCurrents(db, segment.id, now),
    listPermitBriefs(db, { segment: tag }, now),
  ])
  const target = own.target?.value ?? null
  return {
    segment,
    along: all.map(({ tag: each, lineCode, startM, endM, state }) => ({
      tag: each,
      lineCode,
      startM,
      endM,
      state,
    })),
    standing: own.standing,
    gauges: own.gauges,
    pumps: own.pumps,
    target,
    limit: own.limit?.value ?? null,
    predicted: predictedProfile(own, now),
    curves,
    ionCurrents,
    forecast: segment.state === 'pumping' ? forecastPumpDown(own, curves, now, ask) : null,
    bake:
      target === null
        ? null
        : {
            bakeC: BAKE_C,
            targetPa: target,
            answer: bakeToReach(segment, everPlaced, crossOf(own), { pa: target, bakeC: BAKE_C }),
          },
    entries,
    states,
    isolationTests,
    permits,
  }
}

/** Fresh reading at the cross of a segment in service; null otherwise. */
export function crossOf({ segment, standing: { headline } }: StandingSegment): number | null {
  return segment.state === 'in-service' && headline?.fresh ? headline.value : null
}

/** What the page that sets a state needs. @throws DomainError not-found */
export async function readSegmentStates(
  db: Db,
  tag: string,
  now: Date,
): Promise<{ tag: string; state: SegmentState; since: Date | null; reason: string; states: StateSpan[] }> {
  const segment = (await listSegments(db, now)).find((each) => each.tag === tag)
  if (segment === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const states = await listStates(db, segment.id)
  return { tag, state: segment.state, since: segment.since, reason: segment.stateReason, states }
}
