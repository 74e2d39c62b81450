/** What the page that tries a segment with other numbers starts from: the register's model, and what was measured. */
import type { Db } from '../db/client.server.ts'
import { listPlacedPumps, type PlacedPump, type SegmentWithState } from '../db/queries/segments.server.ts'
import { DomainError } from '../domain/errors.ts'
import { usualState, type WhatIfGround, type WhatIfState } from '../domain/what-if.ts'
import { type AskedWhatIf, readWhatIf, whatIfQuery } from '../domain/what-if-query.ts'
import { type WhatIfCurve, whatIfRefusal, whatIfSlices } from '../domain/what-if-solve.ts'
import { PhysicsError } from '../physics/errors.ts'
import { TransportError } from '../physics/transport.ts'
import { readExcess } from './bake-options.server.ts'
import { readCurves } from './segment-curves.server.ts'
import { coldModel } from './segment-model.server.ts'
import { readStandings, type StandingSegment } from './standing.server.ts'

export type SolvedWhatIf = { curve: WhatIfCurve; refusal: null } | { curve: null; refusal: string }

export interface WhatIfPageData {
  tag: string
  /** Null when the register lacks what a model needs. */
  trial: {
    ground: WhatIfGround
    asked: AskedWhatIf
    solved: SolvedWhatIf
    /** Pumping with the register's numbers, to compare with; null where that has no answer. */
    usual: WhatIfCurve | null
  } | null
  targetPa: number | null
  /** The pump-down that is under way, by its gauge at the cross; null when there is none. */
  measured: { gauge: string; hours: number[]; pa: (number | null)[] } | null
  /** Whether the pump of the model has been taken off since. */
  pumpGone: boolean
  /** How many times the register's hydrogen the segment in service reads now; null where that explains the reading. */
  excessTimes: number | null
}

/**
 * The page for the numbers of a query, solved here as well, so that it says the same without a script.
 *
 * @throws DomainError not-found
 */
export async function readWhatIfPage(
  db: Db,
  tag: string,
  now: Date,
  query: URLSearchParams,
): Promise<WhatIfPageData> {
  const own = (await readStandings(db, now, tag))[0]
  if (own === undefined) throw new DomainError('not-found', `The register has no segment ${tag}.`)
  const working = own.pumps.filter(({ kind }) => kind !== 'roughing-set')
  // Without one at work, the last that was: a segment that stands closed can still be thought about.
  const pumps = working.length > 0 ? working : await lastPump(db, own)
  const ground = groundOf(own, pumps)
  const targetPa = own.target?.value ?? null
  const [excess] = await readExcess(db, [tag], now)
  const common = {
    tag,
    targetPa,
    measured: await readMeasured(db, own, now),
    pumpGone: working.length === 0,
    excessTimes: excess?.times ?? null,
  }
  if (ground === null) return { ...common, trial: null }
  const asked = readWhatIf(ground, query)
  const solved = await solve(ground, asked.state)
  const pumping = usualState(ground)
  const same = whatIfQuery(ground, asked.state) === whatIfQuery(ground, pumping)
  const usual = same ? solved.curve : (await solve(ground, pumping)).curve
  return { ...common, trial: { ground, asked, solved, usual } }
}

async function lastPump(db: Db, { segment }: StandingSegment): Promise<PlacedPump[]> {
  const ever = await listPlacedPumps(db, [segment.id])
  return ever.filter(({ kind }) => kind !== 'roughing-set').slice(-1)
}

function groundOf({ segment, gauges }: StandingSegment, pumps: readonly PlacedPump[]): WhatIfGround | null {
  const model = coldModel(segment, pumps)
  if (model === null) return null
  const hot = gauges.filter(({ position }) => position.kind === 'hot-cathode')
  const offset = ({ position }: (typeof gauges)[number]) =>
    (position.chainageM ?? segment.startM) - segment.startM
  const read = hot.find(({ position }) => position.tag.endsWith('B')) ?? hot[0]
  const to = `/register/segments/${segment.tag}`
  const size = `${model.lengthM} m long, ${model.diameterM} m in bore, ${(model.wallM * 1000).toFixed(1)} mm wall`
  const at = hot.map((gauge) => `${gauge.position.tag} at ${offset(gauge)} m`).join(', ')
  return {
    tag: segment.tag,
    model,
    waterCapacityPerM2: segment.waterCapacity,
    gaugeM: read === undefined ? 0 : Math.min(model.lengthM, Math.max(0, offset(read))),
    sources: {
      speed: { text: `${pumps.map(pumpWords).join('; ')}.`, to: pumpAddress(pumps) },
      area: { text: `The plain tube: ${size}.`, to },
      water: { text: `${segment.waterOrigin}.`, to },
      hydrogen: { text: `${hydrogenWords(segment)}.`, to },
      at: { text: at === '' ? 'No hot-cathode gauge stands on the segment.' : `Gauges: ${at}.`, to },
    },
  }
}

function pumpWords({ tag, offsetM, speeds }: PlacedPump): string {
  const each = Object.entries(speeds).map(([gas, speed]) => `${gas} ${speed}`)
  return `${tag} at ${offsetM} m: ${each.join(', ')} m³/s`
}

function pumpAddress(pumps: readonly PlacedPump[]): string {
  const [only, second] = pumps
  return only === undefined || second !== undefined ? '/register/pumps' : `/register/pumps/${only.tag}`
}

function hydrogenWords({ hydrogenOrigin, lastBakeYear, steel, vacuumFired }: SegmentWithState): string {
  const past = lastBakeYear === null ? 'never baked' : `last baked ${lastBakeYear}`
  return `${hydrogenOrigin} (${steel}, ${vacuumFired ? 'fired in vacuum' : 'not fired'}, ${past})`
}

/** Solves at rest, letting other requests have their turn between the slices. */
async function solve(ground: WhatIfGround, state: WhatIfState): Promise<SolvedWhatIf> {
  const refusal = whatIfRefusal(ground, state)
  if (refusal !== null) return { curve: null, refusal }
  try {
    const slices = whatIfSlices(ground, state, 'at-rest')
    for (let slice = slices.next(); ; slice = slices.next()) {
      if (slice.done) return { curve: slice.value, refusal: null }
      await new Promise((resolve) => setImmediate(resolve))
    }
  } catch (error) {
    if (!(error instanceof PhysicsError || error instanceof TransportError)) throw error
    return { curve: null, refusal: `These numbers have no solution: ${error.message}.` }
  }
}

async function readMeasured(db: Db, own: StandingSegment, now: Date): Promise<WhatIfPageData['measured']> {
  if (own.segment.state !== 'pumping') return null
  const { gauges, stepSeconds, kind } = await readCurves(db, own, now)
  const hot = gauges.filter((gauge) => gauge.kind === 'hot-cathode')
  const gauge = hot.find(({ tag }) => tag.endsWith('B')) ?? hot[0]
  if (kind !== 'pump-down' || gauge === undefined) return null
  return {
    gauge: gauge.tag,
    hours: gauge.mean.map((_, step) => ((step + 0.5) * stepSeconds) / 3600),
    pa: gauge.mean,
  }
}
