/**
 * A segment through a temperature programme, by the full solution of transport and wall: what a gauge at room
 * temperature shows through ramp, hold and cooling. Costs some tens of milliseconds; the closed forms in predict.ts
 * answer the everyday questions.
 */
import { requireWithin } from './argument-checks.ts'
import type { GasRun, PointPump, UnbakedArea, WallSource } from './gas-run.ts'
import { nitrogenEquivalent } from './gauges.ts'
import { MILL_AGE_M2 } from './hydrogen.ts'
import { type TemperatureCorners, temperatureAt, temperatureProgramme } from './programme.ts'
import { pumpSpeed, type SegmentModel } from './segment-gas.ts'
import { transportSlices } from './transport.ts'
import { buildMesh, meshNode, type TubeMesh } from './tube.ts'
import { DEFAULT_WATER, WATER_FLOOR_PA } from './water.ts'

const HOUR_S = 3600
/** Cells along the segment unless asked otherwise; the curve at a gauge moves by far less than a gauge can tell. */
const CELLS = 60
/** Water over the wall when high vacuum starts, Pa: the answer forgets it within the first hour (own choice). */
const WATER_START_PA = 1
/** Start of gases that the wall does not hold; they settle within minutes, Pa. */
const GAS_START_PA = 1e-7

export interface SimulationOptions {
  /** Corners of the wall temperature from the start on, s and K. One corner is a constant temperature. */
  corners: TemperatureCorners
  /** Ascending hours after the start, above 0. */
  hours: readonly number[]
  atM: number
  /** Gas temperature at gauges and pumps, K; that of the model unless given. */
  roomK?: number
  /** Cells along the segment, 60 unless given; never shorter than the bore. */
  cells?: number
  tolerance?: number
  cancelled?: () => boolean
  onProgress?: (share: number) => void
}

export interface Simulation {
  hours: Float64Array
  wallK: Float64Array
  /** Reading of a gauge at room temperature: lower than in the hot tube by the root of the temperatures. */
  n2EquivalentPa: Float64Array
  /** Partial pressures at the same gauge, Pa. Water is never shown below the floor of what the model knows. */
  byGasPa: { H2O: Float64Array; H2: Float64Array; N2: Float64Array }
  /** Worst share by which molecules failed to add up. */
  massError: number
}

/**
 * Simulates a segment from the start of high vacuum. `model.temperatureK` is the room's; hydrogen is `agedTauM2` old
 * at the start. A wall already baked starts in equilibrium with its floor. Throws `TransportError` when cancelled.
 */
export function simulateSegment(model: SegmentModel, options: SimulationOptions): Simulation {
  const slices = simulationSlices(model, options)
  let slice = slices.next()
  while (!slice.done) slice = slices.next()
  return slice.value
}

/** The same handed over in slices, as `transportSlices` does: a thread that must not be held up takes one at a time. */
export function* simulationSlices(
  model: SegmentModel,
  options: SimulationOptions,
): Generator<undefined, Simulation, undefined> {
  const roomK = options.roomK ?? model.temperatureK
  requireWithin('roomK', roomK, 200, 400)
  const cells = options.cells ?? CELLS
  requireWithin('cells', cells, 1, 10_000)
  const leaks = model.airLeaks ?? []
  const pointsM = [options.atM, ...model.pumps.map((pump) => pump.atM), ...leaks.map((leak) => leak.atM)]
  const sections = [{ lengthM: model.lengthM, diameterM: model.diameterM }]
  const mesh = buildMesh(
    [{ name: 'segment', sections, pointsM }],
    Math.max(model.diameterM, model.lengthM / cells),
  )
  const programme = temperatureProgramme(options.corners)
  const gases: GasRun[] = [waterRun(model, mesh, roomK), hydrogenRun(model, mesh, roomK)]
  if (leaks.length > 0) gases.push(airRun(model, mesh, roomK))
  const histories = yield* transportSlices({
    mesh,
    thermal: { programmes: [programme] },
    gases,
    fromS: 0,
    outputsS: options.hours.map((hour) => hour * HOUR_S),
    ...(options.tolerance === undefined ? {} : { tolerance: options.tolerance }),
    ...(options.cancelled && { cancelled: options.cancelled }),
    ...(options.onProgress && { onProgress: options.onProgress }),
  })

  const node = meshNode(mesh, 'segment', options.atM)
  const wallK = Float64Array.from(options.hours, (hour) => temperatureAt(programme, hour * HOUR_S))
  const atGauge = (index: number): Float64Array => {
    const history = histories[index]
    // Without a leak no air is solved for.
    if (!history) return new Float64Array(wallK.length)
    return wallK.map((kelvin, k) => history.pressurePa[k]![node]! * Math.sqrt(roomK / kelvin))
  }
  const floor = model.water.state === 'baked' ? model.water.floorPa : WATER_FLOOR_PA
  const byGasPa = { H2O: atGauge(0).map((p) => Math.max(p, floor)), H2: atGauge(1), N2: atGauge(2) }
  return {
    hours: Float64Array.from(options.hours),
    wallK,
    n2EquivalentPa: byGasPa.H2O.map((H2O, k) =>
      nitrogenEquivalent({ H2O, H2: byGasPa.H2[k]!, N2: byGasPa.N2[k]! }),
    ),
    byGasPa,
    massError: Math.max(...histories.map((history) => history.massError)),
  }
}

function waterRun(model: SegmentModel, mesh: TubeMesh, roomK: number): GasRun {
  const { water } = model
  const baked = water.state === 'baked'
  const floorPa = baked ? water.floorPa : WATER_FLOOR_PA
  const pumps = pumpsFor(model, mesh, 'H2O', roomK)
  const speed = pumps.reduce((sum, pump) => sum + (pump.curve[0]?.value?.speedM3S ?? 0), 0)
  const area = Math.PI * model.diameterM * model.lengthM
  // The floor as a source: water that the wall makes new, however empty it is. It also keeps ln p finite.
  const oneHourPaMS = (Math.max(floorPa, WATER_FLOOR_PA) * Math.max(speed, 1e-3)) / area
  return {
    gas: 'H2O',
    startPa: baked ? Math.max(floorPa, WATER_FLOOR_PA) : WATER_START_PA,
    isotherm: { ...DEFAULT_WATER, ...(baked ? {} : { capacityPerM2: water.capacityPerM2 }) },
    ...unbakedOf(model),
    walls: [{ kind: 'power-law', law: { oneHourPaMS, exponent: 0 }, leadS: 1, gasK: roomK }],
    pumps,
  }
}

function hydrogenRun(model: SegmentModel, mesh: TubeMesh, roomK: number): GasRun {
  const { hydrogen, wallM } = model
  const wall: WallSource =
    hydrogen.kind === 'diffusion'
      ? { kind: 'sheet', sheet: { c0PerM3: hydrogen.c0PerM3, wallM }, agedTauM2: hydrogen.agedTauM2 }
      : hydrogen
  return {
    gas: 'H2',
    startPa: GAS_START_PA,
    walls: [wall],
    ...unbakedOf(model),
    pumps: pumpsFor(model, mesh, 'H2', roomK),
  }
}

function airRun(model: SegmentModel, mesh: TubeMesh, roomK: number): GasRun {
  const leaks = (model.airLeaks ?? []).map((leak) => ({
    node: meshNode(mesh, 'segment', leak.atM),
    loadPaM3S: [{ fromS: 0, value: leak.qPaM3S }],
    gasK: roomK,
  }))
  return { gas: 'N2', startPa: GAS_START_PA, leaks, pumps: pumpsFor(model, mesh, 'N2', roomK) }
}

function pumpsFor(model: SegmentModel, mesh: TubeMesh, gas: 'H2O' | 'H2' | 'N2', roomK: number): PointPump[] {
  return model.pumps.map((pump) => ({
    node: meshNode(mesh, 'segment', pump.atM),
    mouthK: roomK,
    curve: [{ fromS: 0, value: { kind: 'constant', speedM3S: pumpSpeed(pump, gas) } }],
  }))
}

function unbakedOf(model: SegmentModel): { unbaked?: UnbakedArea } {
  const area = model.unbakedArea
  return area ? { unbaked: { agedTauM2: MILL_AGE_M2, ...area, roomK: model.temperatureK } } : {}
}
