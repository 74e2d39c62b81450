/** The main line of sixteen segments and the spur. Lengths in metres. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { line, segment, site } from '../../app/db/schema/index.ts'
import type { Feeder } from '../../app/domain/register.ts'
import { DEMO_ZONE } from '../demo-time.ts'

const MAIN_LINE_ID = 1
const SPUR_ID = 2

/** Valve boxes VB-00 to VB-16 along the main line; a segment runs from one to the next. */
export const BOX_CHAINAGE = [
  0, 150, 300, 450, 600, 750, 900, 1040, 1200, 1350, 1500, 1650, 1800, 1950, 2100, 2250, 2400,
]

/** Chainage of box VB-08, where the spur leaves. */
const SPUR_LEAVES_AT = 1200
const SPUR_LENGTH = 90
/** West of here bakes draw from the west feeder; the rest and the spur from the east one. */
const FEEDERS_MEET_AT = 1200

/** Resistivity of 304L at 20 °C, Ω·m; from memory, not verified. 316LN is taken to be the same. */
const RESISTIVITY_20 = 7.2e-7

/** What the register says of hydrogen: atoms/m³ in steel that was not fired, Pa·m/s at 20 °C from steel that was. */
export const HYDROGEN_C0 = 7e23
export const HYDROGEN_Q20 = 4e-10
/** Molecules of water a square metre of wall can hold. */
export const WATER_CAPACITY = 5e19

export interface DemoSegment {
  id: number
  tag: string
  /** Middle of the tags of its parts: 05 in HC-05A, S1 in HC-S1A. */
  short: string
  lineId: number
  startM: number
  endM: number
  diameterM: number
  wallM: number
  steel: '304L' | '316LN'
  fired: boolean
  lastBakeYear: number | null
}

const BAKED: readonly (number | null)[] = [
  2021,
  2021,
  2022,
  2022,
  2017,
  2026,
  2023,
  2018,
  2023,
  2026,
  null,
  2016,
  2022,
  2020,
  2025,
  2015,
]
const FIRED = new Set([3, 4, 9, 10, 13, 15])
const STEEL_316LN = new Set([5, 12])

function mainSegment(number: number): DemoSegment {
  const short = String(number).padStart(2, '0')
  return {
    id: number,
    tag: `SG-${short}`,
    short,
    lineId: MAIN_LINE_ID,
    startM: BOX_CHAINAGE[number - 1] as number,
    endM: BOX_CHAINAGE[number] as number,
    diameterM: number <= 8 ? 0.6 : 0.5,
    wallM: 0.003,
    steel: STEEL_316LN.has(number) ? '316LN' : '304L',
    fired: FIRED.has(number),
    lastBakeYear: BAKED[number - 1] ?? null,
  }
}

/** All seventeen, west to east, the spur last. */
export const SEGMENTS: readonly DemoSegment[] = [
  ...Array.from({ length: 16 }, (_, index) => mainSegment(index + 1)),
  {
    id: 17,
    tag: 'SP-1',
    short: 'S1',
    lineId: SPUR_ID,
    startM: 0,
    endM: SPUR_LENGTH,
    diameterM: 0.35,
    wallM: 0.0025,
    steel: '304L',
    fired: false,
    lastBakeYear: 2019,
  },
]

/** The segment with a tag; a tag that does not exist is a slip in the seed. */
export function segmentOf(tag: string): DemoSegment {
  const found = SEGMENTS.find((one) => one.tag === tag)
  if (found === undefined) throw new Error(`The demo has no segment ${tag}`)
  return found
}

function hydrogenFacts({ fired, lastBakeYear }: DemoSegment) {
  if (fired) {
    const origin = 'Measured by a rise of pressure over two days after the last bake'
    return {
      hydrogenModel: 'low-hydrogen' as const,
      hydrogenC0: null,
      hydrogenQ20: HYDROGEN_Q20,
      hydrogenOrigin: origin,
    }
  }
  return {
    hydrogenModel: 'diffusion' as const,
    hydrogenC0: HYDROGEN_C0,
    hydrogenQ20: null,
    hydrogenOrigin:
      lastBakeYear === null
        ? 'Assumed: the same mill as the other segments that were not fired'
        : 'Fitted to the rise of pressure after the last bake',
  }
}

/** Writes the site, both lines and all segments. */
export async function seedSegments(db: DbOrTx): Promise<number> {
  await db.insert(site).values({
    id: 1,
    code: 'QFL',
    name: 'Quillmere Flight Path',
    timeZone: DEMO_ZONE,
    ambientC: 18,
  })
  const mainLength = BOX_CHAINAGE.at(-1) as number
  await db.insert(line).values([
    { id: MAIN_LINE_ID, code: 'MAIN', name: 'Main line', lengthM: mainLength, sortOrder: 1 },
    {
      id: SPUR_ID,
      code: 'SPUR',
      name: 'Spur to the side cellar',
      lengthM: SPUR_LENGTH,
      joinsLineId: MAIN_LINE_ID,
      joinsAtM: SPUR_LEAVES_AT,
      sortOrder: 2,
    },
  ])
  await db.insert(segment).values(
    SEGMENTS.map((one) => {
      const length = one.endM - one.startM
      const steelArea = Math.PI * (one.diameterM + one.wallM) * one.wallM
      return {
        id: one.id,
        lineId: one.lineId,
        tag: one.tag,
        startM: one.startM,
        endM: one.endM,
        innerDiameterM: one.diameterM,
        wallM: one.wallM,
        steel: one.steel,
        vacuumFired: one.fired,
        lastBakeYear: one.lastBakeYear,
        ...hydrogenFacts(one),
        waterCapacity: WATER_CAPACITY,
        waterOrigin: 'Assumed: about five layers of water on rolled steel; no fit yet',
        bellowsCount: one.tag === 'SP-1' ? 6 : 10,
        bellowsTravelMm: one.tag === 'SG-08' ? 36 : 34,
        bellowsRatedMm: 45,
        insulationM: 0.1,
        insulationWPerMK: 0.045,
        resistance20Ohm: Number(((RESISTIVITY_20 * length) / steelArea).toPrecision(3)),
        feeder: (one.lineId === MAIN_LINE_ID && one.startM < FEEDERS_MEET_AT ? 'west' : 'east') as Feeder,
        sortOrder: one.id,
      }
    }),
  )
  return SEGMENTS.length
}
