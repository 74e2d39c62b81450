/** The heating that a permit allows, and how far it has come by what people have set of its segments. */
import type { DbOrTx } from '../db/client.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import { listSegments, listStates, type SegmentWithState } from '../db/queries/segments.server.ts'
import { bakesIn, type FoundBake } from '../domain/bake-history.ts'
import { heatedTube } from '../domain/bake-load.ts'
import { instantText } from '../domain/instant-text.ts'
import type { CurveFacts } from '../domain/paper/curve.ts'
import type { PaperFacts } from '../domain/permit-sheets.ts'
import { coolSeconds } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'

const HOUR_MS = 3_600_000
/** The curve is drawn down to a temperature at which a hand can rest. */
const COLD_C = 40
const COOLING_STEPS = 30

interface Surroundings {
  ambientC: number
  timeZone: string
}

/** Null while the permit does not say how it is heated. */
export async function readPaperCurve(
  db: DbOrTx,
  { content, windowFrom, windowTo }: PermitRow,
  now: Date,
  { ambientC, timeZone }: Surroundings,
): Promise<PaperFacts['curve']> {
  const { maxCelsius, rampKH, soakHours, supply, segments } = content
  if (maxCelsius === null || rampKH === null || soakHours === null || maxCelsius <= ambientC) return null
  const first = (await listSegments(db, now)).find(({ tag }) => segments.includes(tag))
  // A blanket warms a part whose cooling nobody knows; the states of a segment tell of its tube.
  const tube = supply === null ? undefined : first
  const bake = tube === undefined ? null : await bakeWithin(db, tube.id, windowFrom, windowTo)
  const hours = (at: Date) => (now.getTime() - at.getTime()) / HOUR_MS
  return {
    ambientC,
    maxCelsius,
    rampKH,
    soakHours,
    cooling: tube === undefined ? [] : coolingOf(tube, ambientC, maxCelsius),
    nowH: bake === null ? null : hours(bake.heatingFrom),
    startText: bake === null ? null : instantText(bake.heatingFrom, timeZone),
    stepText:
      supply === null
        ? 'Not followed: what is known of a blanket is what people say of it.'
        : stepText(bake, soakHours, hours, (at) => instantText(at, timeZone)),
  }
}

async function bakeWithin(
  db: DbOrTx,
  segmentId: number,
  from: Date | null,
  to: Date | null,
): Promise<FoundBake | null> {
  if (from === null || to === null) return null
  const bakes = bakesIn(await listStates(db, segmentId))
  return bakes.find(({ heatingFrom }) => heatingFrom >= from && heatingFrom < to) ?? null
}

function stepText(
  bake: FoundBake | null,
  soakHours: number,
  hours: (at: Date) => number,
  when: (at: Date) => string,
): string {
  if (bake === null) return 'Heating has not begun.'
  const { phase, heatingFrom, soakFrom, coolingFrom, coldFrom } = bake
  const count = (at: Date) => Math.floor(hours(at))
  if (phase === 'over' && coldFrom !== null) return `Cold since ${when(coldFrom)}.`
  if (phase === 'cooling' && coolingFrom !== null) {
    return `Cooling: heating off since ${when(coolingFrom)}, hour ${count(coolingFrom)}.`
  }
  if (phase === 'soak' && soakFrom !== null) {
    const day = Math.floor(hours(soakFrom) / 24) + 1
    return `Soak: since ${when(soakFrom)}, hour ${count(soakFrom)} of ${soakHours}, day ${day} of ${Math.ceil(soakHours / 24)}.`
  }
  return `Ramp: since ${when(heatingFrom)}, hour ${count(heatingFrom)}.`
}

/** Free cooling of the tube behind its insulation, by the register's figures. */
function coolingOf(segment: SegmentWithState, ambientC: number, fromC: number): CurveFacts['cooling'] {
  const lowest = Math.max(COLD_C, ambientC + 1)
  if (fromC <= lowest) return []
  const tube = heatedTube(segment, ambientC)
  return Array.from({ length: COOLING_STEPS }, (_, index) => {
    const celsius = fromC - ((index + 1) / COOLING_STEPS) * (fromC - lowest)
    return { hours: coolSeconds(tube, celsiusToKelvin(fromC), celsiusToKelvin(celsius)) / 3600, celsius }
  })
}
