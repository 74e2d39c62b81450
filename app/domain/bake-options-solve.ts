/**
 * The soak that one temperature needs: closed forms name it, the full solution of transport and wall confirms it or
 * corrects it. Hours and °C; pressures nitrogen-equivalent at the gauge that reads highest, in Pa.
 */
import { afterBake, type BakeOutcome, type BakeProgramme, holdToMeet } from '../physics/bake.ts'
import { nitrogenEquivalent } from '../physics/gauges.ts'
import { type SegmentModel, unitPressure } from '../physics/segment-gas.ts'
import { simulateSegment } from '../physics/simulate.ts'
import { coolSeconds, type HeatedTube, thermalTime } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'
import { WATER_FLOOR_PA } from '../physics/water.ts'

/** The target counts a day after the tube is cold, as the site's own target does. */
export const JUDGED_AFTER_H = 24
/** Full solves that a temperature may cost, both segments of a pair together. */
export const MOST_SOLVES = 5
/** A baked wall starts hydrogen from rest: an hour cold settles it, and nothing of it is left after a bake. */
const LEAD_H = 1
/** Points that the free cooling curve is drawn through. */
const COOL_POINTS = 12

/** One segment in its two vacuums: hot on the pump of the bake, cold on the pump of service. */
export interface SolvedSegment {
  model: SegmentModel
  afterPumps: SegmentModel['pumps']
  /** Place of the gauge that reads highest, m from the start of the segment. */
  atM: number
  /** Hours of cold pumping before the heat. */
  coldHours: number
  tube: HeatedTube
}

/** The way up and down that all holds of one temperature share. */
export interface HeatPath {
  celsius: number
  ambientC: number
  upKH: number
  coldC: number
}

/** Hours from the top of a bake until the tube is below `coldC` by itself. */
export function freeCoolHours(tube: HeatedTube, { celsius, coldC }: HeatPath): number {
  return celsius <= coldC ? 0 : coolSeconds(tube, celsiusToKelvin(celsius), celsiusToKelvin(coldC)) / 3600
}

/** The programme that the closed forms take: cooling as fast as it is near the top, where it counts. */
export function closedProgramme(
  { tube, afterPumps }: SolvedSegment,
  { celsius, ambientC, upKH }: HeatPath,
  holdHours: number,
): BakeProgramme {
  const bakeK = celsiusToKelvin(celsius)
  return {
    bakeK,
    holdHours,
    upKH,
    downKH: ((celsius - ambientC) / thermalTime(tube, bakeK)) * 3600,
    coldHours: JUDGED_AFTER_H,
    afterPumps,
  }
}

/** Hours of hold by the closed forms; null where a year would not do. */
export function closedHold(segment: SolvedSegment, path: HeatPath, targetPa: number): number | null {
  const found = holdToMeet(segment.model, closedProgramme(segment, path, 0), targetPa, segment.atM)
  return found === null ? null : found.holdHours
}

export type SolvedOutcome = Pick<
  BakeOutcome,
  'waterPa' | 'waterAtFloor' | 'hydrogenPa' | 'airPa' | 'n2EquivalentPa' | 'limitedBy'
>

/** The same by the full solution, a day after the tube is cold. One solve. */
export function fullOutcome(segment: SolvedSegment, path: HeatPath, holdHours: number): SolvedOutcome {
  const { model, afterPumps, atM, tube } = segment
  const leadH = Math.max(LEAD_H, segment.coldHours)
  const rampH = (path.celsius - path.ambientC) / path.upKH
  const coolH = freeCoolHours(tube, path)
  const endH = leadH + rampH + holdHours
  const corners = [
    { hours: leadH, kelvin: model.temperatureK },
    { hours: leadH + rampH, kelvin: celsiusToKelvin(path.celsius) },
    ...(holdHours > 0 ? [{ hours: endH, kelvin: celsiusToKelvin(path.celsius) }] : []),
    ...coolingCorners(segment, path).map(({ hours, kelvin }) => ({ hours: endH + hours, kelvin })),
    { hours: endH + coolH + 0.75 * JUDGED_AFTER_H, kelvin: model.temperatureK },
  ]
  const run = simulateSegment(model, {
    corners: corners.map(({ hours, kelvin }) => ({ atS: hours * 3600, kelvin })),
    hours: [endH + coolH + JUDGED_AFTER_H],
    atM,
  })
  const waterPa = run.byGasPa.H2O[0] ?? Number.NaN
  // The wall gives hydrogen, and a leak air, whatever the pressure: other pumps change both by how they pump them.
  const hydrogenPa = (run.byGasPa.H2[0] ?? Number.NaN) * pumpedAlike(model, afterPumps, 'H2', atM)
  const leaky = (model.airLeaks ?? []).length > 0
  const airPa = leaky ? (run.byGasPa.N2[0] ?? Number.NaN) * pumpedAlike(model, afterPumps, 'N2', atM) : 0
  const shares = {
    water: nitrogenEquivalent({ H2O: waterPa }),
    hydrogen: nitrogenEquivalent({ H2: hydrogenPa }),
    air: airPa,
  }
  // A shade above the floor, as a baked wall settles, is still the floor.
  const waterAtFloor = waterPa <= 1.5 * WATER_FLOOR_PA
  let limitedBy: SolvedOutcome['limitedBy'] = shares.hydrogen >= shares.air ? 'hydrogen' : 'air'
  if (!waterAtFloor && shares.water > shares[limitedBy]) limitedBy = 'water'
  return {
    waterPa,
    waterAtFloor,
    hydrogenPa,
    airPa,
    n2EquivalentPa: shares.water + shares.hydrogen + shares.air,
    limitedBy,
  }
}

function coolingCorners({ tube }: SolvedSegment, path: HeatPath): { hours: number; kelvin: number }[] {
  if (path.celsius <= path.coldC) return []
  return Array.from({ length: COOL_POINTS }, (_, i) => {
    const celsius = path.celsius - ((i + 1) / COOL_POINTS) * (path.celsius - path.coldC)
    return {
      hours: freeCoolHours(tube, { ...path, coldC: celsius }),
      kelvin: celsiusToKelvin(celsius),
    }
  })
}

function pumpedAlike(
  model: SegmentModel,
  afterPumps: SegmentModel['pumps'],
  gas: 'H2' | 'N2',
  atM: number,
): number {
  return unitPressure({ ...model, pumps: afterPumps }, gas, atM) / unitPressure(model, gas, atM)
}

interface ConfirmedSoak {
  soakHours: number
  /** In the order of the segments. */
  outcomes: SolvedOutcome[]
  solves: number
}

/**
 * Whole hours of soak that the full solution confirms for every segment, from the closed forms' answer on. Hands over
 * after every solve, so that a thread with other work can take a breath.
 *
 * @param solve the full solution; given by tests that count
 * @returns null where the solves were used up before the target was met
 */
export function* confirmSoak(
  segments: readonly SolvedSegment[],
  path: HeatPath,
  targetPa: number,
  solve: typeof fullOutcome = fullOutcome,
): Generator<undefined, ConfirmedSoak | null, undefined> {
  const first = segments.map((segment) => closedHold(segment, path, targetPa))
  if (first.some((hours) => hours === null)) return null
  const hoursOf = first.map((hours) => Math.ceil(hours ?? 0))
  // The segment that needs most decides; the other one is looked at once, at the soak that came out.
  const order = segments.map((_, i) => i).sort((a, b) => (hoursOf[b] ?? 0) - (hoursOf[a] ?? 0))
  let soak = Math.max(...hoursOf)
  let solves = 0
  const met = new Map<number, SolvedOutcome>()
  for (const [turn, index] of order.entries()) {
    const segment = segments[index]
    if (segment === undefined) continue
    // One solve is kept back for each segment that has not had its turn.
    const budget = MOST_SOLVES - (order.length - 1 - turn)
    let tried = soak
    let shortest: { hours: number; outcome: SolvedOutcome } | null = null
    while (solves < budget) {
      const outcome = solve(segment, path, tried)
      solves += 1
      yield
      if (outcome.n2EquivalentPa <= targetPa) shortest = { hours: tried, outcome }
      const closed = afterBake(segment.model, closedProgramme(segment, path, tried), segment.atM)
      const ratio = outcome.n2EquivalentPa / closed.n2EquivalentPa
      const corrected = closedHold(segment, path, (0.998 * targetPa) / ratio)
      const next = corrected === null ? null : Math.ceil(corrected)
      if (shortest === null) {
        if (next === null) return null
        tried = Math.max(next, tried + 1)
      } else if (turn === 0 && outcome === shortest.outcome && next !== null && next < 0.95 * tried - 1) {
        // The closed forms asked for too much; what the first segment can spare is tried once more.
        tried = next
      } else break
    }
    if (shortest === null) return null
    soak = Math.max(soak, shortest.hours)
    if (turn === 0) soak = shortest.hours
    met.set(index, shortest.outcome)
  }
  return {
    soakHours: soak,
    outcomes: segments.map((_, i) => met.get(i)).filter((outcome) => outcome !== undefined),
    solves,
  }
}
