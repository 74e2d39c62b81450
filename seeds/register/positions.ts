/** Places where something is measured, in the order in which their ids run. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { position } from '../../app/db/schema/index.ts'
import type { Quantity } from '../../app/domain/readings.ts'
import type { PositionKind } from '../../app/domain/register.ts'
import { SEGMENTS } from './segments.ts'

/** Source whose files carry a position's channel; hand readings are possible everywhere they make sense. */
export type SourceCode = 'NL-W' | 'NL-E' | 'NL-T' | 'NL-P' | 'NL-R' | 'REC' | 'HAND'

export interface DemoPosition {
  id: number
  tag: string
  kind: PositionKind
  quantity: Quantity
  segmentId: number | null
  lineId: number | null
  chainageM: number | null
  label: string
  /** Null for what is only ever read by eye. */
  logger: SourceCode | null
  /** Whether a value may be typed in. */
  typed: boolean
}

type Draft = Omit<DemoPosition, 'id'>

/** Gauges stand this far inside the end flanges, metres. */
const GAUGE_INSET = 1
/** Mass numbers that the analyser RG-A follows. */
export const GASES_WATCHED = [2, 4, 18, 28, 32, 40, 44] as const

function gauges(): Draft[] {
  return SEGMENTS.flatMap((one) => {
    const middle = (one.startM + one.endM) / 2
    const logger: SourceCode = one.id <= 8 ? 'NL-W' : 'NL-E'
    const shared = {
      quantity: 'pressure' as const,
      segmentId: one.id,
      lineId: one.lineId,
      typed: true,
    }
    const hot = { ...shared, kind: 'hot-cathode' as const, logger }
    return [
      { ...hot, tag: `HC-${one.short}A`, chainageM: one.startM + GAUGE_INSET, label: 'west end' },
      { ...hot, tag: `HC-${one.short}B`, chainageM: middle, label: 'cross' },
      {
        ...shared,
        kind: 'cold-cathode' as const,
        logger,
        tag: `CC-${one.short}`,
        chainageM: one.endM - GAUGE_INSET,
        label: 'east end',
      },
      {
        ...shared,
        kind: 'thermal-conductivity' as const,
        logger: null,
        tag: `TC-${one.short}`,
        chainageM: middle,
        label: 'cross',
      },
    ]
  })
}

/** Several of a kind at equal spacing along every segment. */
function alongSegments(
  prefix: 'TH' | 'BX',
  counts: { main: number; spur: number },
  shared: Pick<Draft, 'kind' | 'quantity' | 'logger' | 'typed' | 'label'>,
): Draft[] {
  return SEGMENTS.flatMap((one) => {
    const count = one.tag === 'SP-1' ? counts.spur : counts.main
    const pitch = (one.endM - one.startM) / count
    return Array.from({ length: count }, (_, index) => ({
      ...shared,
      tag: `${prefix}-${one.short}-${String(index + 1).padStart(2, '0')}`,
      segmentId: one.id,
      lineId: one.lineId,
      chainageM: Number((one.startM + (index + 0.5) * pitch).toFixed(3)),
    }))
  })
}

function supplies(): Draft[] {
  const nowhere = { segmentId: null, lineId: null, chainageM: null, logger: 'NL-P' as const, typed: true }
  return [
    ...['HX-1', 'HX-2', 'HX-3'].flatMap((tag) => [
      {
        ...nowhere,
        tag: `${tag}-U`,
        kind: 'supply-volts' as const,
        quantity: 'voltage' as const,
        label: `${tag} at its terminals`,
      },
      {
        ...nowhere,
        tag: `${tag}-I`,
        kind: 'supply-amps' as const,
        quantity: 'current' as const,
        label: `${tag} output`,
      },
    ]),
    ...['W', 'E'].map((side) => ({
      ...nowhere,
      tag: `EM-${side}`,
      kind: 'energy-meter' as const,
      quantity: 'energy' as const,
      label: side === 'W' ? 'Feeder west' : 'Feeder east',
    })),
    ...SEGMENTS.map((one) => ({
      tag: `IP-${one.short}`,
      kind: 'ion-pump-current' as const,
      quantity: 'ion-current' as const,
      segmentId: one.id,
      lineId: one.lineId,
      chainageM: (one.startM + one.endM) / 2,
      label: `Ion part of PX-${one.short}`,
      logger: 'NL-P' as const,
      typed: false,
    })),
    ...Array.from({ length: 8 }, (_, index) => ({
      ...nowhere,
      tag: `BF-${String(index + 1).padStart(2, '0')}`,
      kind: 'bay-fan' as const,
      quantity: 'switch' as const,
      lineId: 1,
      chainageM: 150 + index * 300,
      label: 'Bay fan',
      typed: false,
    })),
  ]
}

function gasAndOxygen(): Draft[] {
  return [
    ...GASES_WATCHED.map((mass) => ({
      tag: `RG-A-${String(mass).padStart(2, '0')}`,
      kind: 'partial-pressure' as const,
      quantity: 'ion-current' as const,
      segmentId: 6,
      lineId: 1,
      chainageM: 825,
      label: `m/z ${mass}`,
      logger: 'NL-R' as const,
      typed: false,
    })),
    ...Array.from({ length: 12 }, (_, index) => ({
      tag: `OX-${index + 1}`,
      kind: 'oxygen' as const,
      quantity: 'oxygen' as const,
      segmentId: null,
      lineId: 1,
      chainageM: 100 + index * 200,
      label: 'Tunnel wall, breathing height',
      logger: null,
      typed: true,
    })),
  ]
}

/** Where RG-B stood for the night of the isolated test. */
function closedSegmentGas(): Draft[] {
  return [2, 40].map((mass) => ({
    tag: `RG-B-${String(mass).padStart(2, '0')}`,
    kind: 'partial-pressure',
    quantity: 'ion-current',
    segmentId: 13,
    lineId: 1,
    chainageM: 1875,
    label: `m/z ${mass}`,
    logger: null,
    typed: false,
  }))
}

/** The bars at both ends of a segment, between which its resistance is measured before and after a bake. */
function tubeEnds(): Draft[] {
  return SEGMENTS.map((one) => ({
    tag: `RE-${one.short}`,
    kind: 'tube-ends',
    quantity: 'resistance',
    segmentId: one.id,
    lineId: one.lineId,
    chainageM: (one.startM + one.endM) / 2,
    label: 'Between the bars at both ends',
    logger: null,
    typed: true,
  }))
}

/** Every position of the demo. */
export const POSITIONS: readonly DemoPosition[] = [
  ...gauges(),
  ...alongSegments(
    'TH',
    { main: 12, spur: 8 },
    { kind: 'thermocouple', quantity: 'temperature', logger: 'NL-T', typed: true, label: 'Tube wall, top' },
  ),
  ...alongSegments(
    'BX',
    { main: 10, spur: 6 },
    {
      kind: 'bellows-scale',
      quantity: 'stroke',
      logger: null,
      typed: true,
      label: 'Scale beside the bellows',
    },
  ),
  ...supplies(),
  ...gasAndOxygen(),
  ...tubeEnds(),
  ...closedSegmentGas(),
].map((draft, index) => ({ id: index + 1, ...draft }))

/** Writes the positions. */
export async function seedPositions(db: DbOrTx): Promise<number> {
  await db.insert(position).values(
    POSITIONS.map(({ id, tag, kind, quantity, segmentId, lineId, chainageM, label }) => ({
      id,
      tag,
      kind,
      quantity,
      segmentId,
      lineId,
      chainageM,
      label,
    })),
  )
  return POSITIONS.length
}
