/** Valves, pumps and where they work, heaters, supplies, and other equipment of the demo. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { equipment, heaterCircuit, pump, pumpPlacement, supplySet, valve } from '../../app/db/schema/index.ts'
import type { PumpKind, PumpSpeeds } from '../../app/domain/register.ts'
import { at, REGISTER_BEGAN } from '../demo-time.ts'
import { BAKES } from '../scenario/bakes.ts'
import { LEAKS, VENTS } from '../scenario/events.ts'
import { CART, GETTER_ION } from './pump-speeds.ts'
import { BOX_CHAINAGE, type DemoSegment, SEGMENTS, segmentOf } from './segments.ts'

/** Elastomer seals in the bonnet stand less heat than the metal ones. */
const ELASTOMER = new Set(['GV-04', 'GV-08', 'GV-12', 'GV-S'])

function gateFacts(tag: string) {
  const elastomer = ELASTOMER.has(tag)
  return {
    kind: 'gate' as const,
    seal: elastomer ? 'metal seat, elastomer bonnet' : 'all metal',
    limitC: elastomer ? 120 : 150,
    partRiseShare: elastomer ? 0.7 : 1,
  }
}

/** Segments whose gate valves are shut at the demo's start, and why. */
const SHUT_GATES: Record<string, string> = {
  'GV-04': 'Shut and locked for the bake of SG-05',
  'GV-05': 'Shut and locked for the bake of SG-05',
  'GV-07': 'Shut and locked for the bake of SG-08',
  'GV-08': 'Shut and locked for the bake of SG-08',
  'GV-10': 'Shut: SG-11 is pumped on its own',
  'GV-11': 'Shut: SG-11 is pumped on its own',
  'GV-12': 'Shut for the isolated test of SG-13',
  'GV-13': 'Locked shut: SG-14 is vented',
  'GV-14': 'Locked shut: SG-14 is vented',
  'GV-S': 'Shut: the spur is being roughed',
}

const middleOf = (one: DemoSegment) => (one.startM + one.endM) / 2

async function seedValves(db: DbOrTx): Promise<void> {
  const mainGates = BOX_CHAINAGE.map((chainageM, index) => {
    const number = String(index).padStart(2, '0')
    const tag = `GV-${number}`
    return {
      tag,
      ...gateFacts(tag),
      lineId: 1,
      chainageM,
      box: `VB-${number}`,
      segmentId: index === 0 ? null : index,
      eastSegmentId: index === 16 ? null : index + 1,
      normalPosition: index === 0 || index === 16 ? 'shut' : 'open',
      note: SHUT_GATES[tag] ?? '',
    }
  })
  const spurGate = {
    tag: 'GV-S',
    ...gateFacts('GV-S'),
    lineId: 2,
    chainageM: 0,
    box: 'VB-08',
    segmentId: 8,
    eastSegmentId: 17,
    normalPosition: 'open',
    note: SHUT_GATES['GV-S'] ?? '',
  }
  const ports = SEGMENTS.map((one) => ({
    tag: `PV-${one.short}`,
    kind: 'pump-port' as const,
    lineId: one.lineId,
    chainageM: middleOf(one),
    box: '',
    segmentId: one.id,
    eastSegmentId: null,
    seal: 'all metal, angle',
    limitC: 150,
    partRiseShare: 1,
    normalPosition: 'locked open in service',
    note: one.tag === 'SG-13' ? 'Shut since 2026-11-08 20:00 for the isolated test' : '',
  }))
  const vents = SEGMENTS.map((one) => ({
    tag: `NV-${one.short}`,
    kind: 'vent' as const,
    lineId: one.lineId,
    chainageM: one.startM + 2,
    box: one.tag === 'SP-1' ? 'VB-08' : `VB-${String(one.id - 1).padStart(2, '0')}`,
    segmentId: one.id,
    eastSegmentId: null,
    seal: 'all metal',
    limitC: 150,
    partRiseShare: 1,
    normalPosition: 'locked shut',
    note: 'Has a relief valve at 0.1 bar over the tunnel',
  }))
  await db.insert(valve).values([...mainGates, spurGate, ...ports, ...vents])
}

/** 250 m³/h, whatever the gas. */
const ROUGHING: PumpSpeeds = { N2: 0.0694, O2: 0.0694, Ar: 0.0694, H2O: 0.0694 }

const CARTS = ['MC-A', 'MC-B', 'MC-C', 'MC-D'] as const

interface DemoPump {
  tag: string
  kind: PumpKind
  speeds: PumpSpeeds
  ultimatePa: number
  note: string
}

const PUMPS: readonly DemoPump[] = [
  ...SEGMENTS.map(({ short, tag }) => ({
    tag: `PX-${short}`,
    kind: 'getter-ion' as const,
    speeds: GETTER_ION,
    ultimatePa: 0,
    note: tag === 'SG-11' ? 'Fitted, getter never activated: the segment has not been baked' : '',
  })),
  ...CARTS.map((tag) => ({
    tag,
    kind: 'turbomolecular-cart' as const,
    speeds: CART,
    ultimatePa: 1e-8,
    note: tag === 'MC-D' ? 'Carries RG-A' : tag === 'MC-B' ? 'Carries RG-B' : '',
  })),
  ...['RS-1', 'RS-2'].map((tag) => ({
    tag,
    kind: 'roughing-set' as const,
    speeds: ROUGHING,
    ultimatePa: 0.5,
    note: '250 m³/h, dry',
  })),
]

interface Placement {
  pump: string
  segment: string
  from: Date
  until: Date | null
  reason: string
}

/** Until when the pump at the cross worked, where it does not work now. */
const CROSS_STOPPED: Record<string, string> = {
  'SG-05': '2026-11-04 19:30',
  'SG-08': '2026-11-01 09:50',
  'SG-13': '2026-11-08 20:00',
  'SG-14': '2026-11-05 07:15',
  'SP-1': '2026-10-28 08:30',
}

/** Stretches of the past in which a cart pumped instead of the pump at the cross: for a vent, a bake or both. */
function pastCartWork() {
  return BAKES.flatMap(({ segment, cart, cartAt, coldAt, rampAt }) => {
    if (coldAt === null) return []
    const vent = VENTS.find(
      (one) => one.segment === segment && one.pumpingAt !== null && one.pumpingAt < rampAt,
    )
    return [
      { segment, cart, vent, stoppedAt: vent?.ventedAt ?? cartAt, cartAt: vent?.pumpingAt ?? cartAt, coldAt },
    ]
  })
}

/** The pump at the cross, but for the stretches in which it was valved off. */
function crossPump(segment: string, pumpTag: string): Placement[] {
  const past = pastCartWork().filter((one) => one.segment === segment)
  const ends = CROSS_STOPPED[segment]
  const own = { pump: pumpTag, segment, reason: 'Own pump of the segment' }
  return [
    ...past.map(({ stoppedAt }, index) => ({
      ...own,
      from: past[index - 1]?.coldAt ?? REGISTER_BEGAN,
      until: stoppedAt,
    })),
    { ...own, from: past.at(-1)?.coldAt ?? REGISTER_BEGAN, until: ends === undefined ? null : at(ends) },
  ]
}

function pastPlacements(): Placement[] {
  return pastCartWork().flatMap(({ segment, cart, vent, cartAt, coldAt }) => {
    const reason = vent === undefined ? 'Pumps during the bake' : 'High vacuum after the vent, and the bake'
    const onCart = { pump: cart, segment, from: cartAt, until: coldAt, reason }
    if (vent?.roughingAt == null) return [onCart]
    const roughing = { segment, from: vent.roughingAt, until: cartAt, reason: 'Roughing after the vent' }
    return [{ pump: vent.roughingSet, ...roughing }, onCart]
  })
}

function placements(): Placement[] {
  const crosses = SEGMENTS.filter(({ tag }) => tag !== 'SG-11').flatMap(({ tag, short }) =>
    crossPump(tag, `PX-${short}`),
  )
  return [
    ...crosses,
    ...pastPlacements(),
    {
      pump: 'MC-C',
      segment: 'SG-08',
      from: at('2026-11-01 09:50'),
      until: null,
      reason: 'Pumps during the bake',
    },
    {
      pump: 'MC-A',
      segment: 'SG-05',
      from: at('2026-11-04 19:30'),
      until: null,
      reason: 'Pumps during the bake',
    },
    {
      pump: 'RS-2',
      segment: 'SG-11',
      from: at('2026-11-06 09:40'),
      until: at('2026-11-06 14:00'),
      reason: 'Roughing after the bellows of the west end were exchanged',
    },
    {
      pump: 'MC-B',
      segment: 'SG-11',
      from: at('2026-11-06 14:00'),
      until: null,
      reason: 'High vacuum until the bake',
    },
    {
      pump: 'RS-1',
      segment: 'SP-1',
      from: at('2026-11-09 07:40'),
      until: null,
      reason: 'At the far end: the root lies within ten metres of SG-08, which is hot',
    },
  ]
}

/** Metres from a segment's start: the cross at mid-length, or the spur's far end for the roughing set there. */
function offsetOf({ pump: tag, segment: segmentTag }: Placement): number {
  const one = segmentOf(segmentTag)
  const length = one.endM - one.startM
  return tag === 'RS-1' ? length : length / 2
}

async function seedPumps(db: DbOrTx): Promise<void> {
  await db.insert(pump).values(PUMPS.map((one, index) => ({ id: index + 1, ...one })))
  const pumpId = new Map(PUMPS.map(({ tag }, index) => [tag, index + 1]))
  await db.insert(pumpPlacement).values(
    placements().map((one) => ({
      pumpId: pumpId.get(one.pump) as number,
      segmentId: segmentOf(one.segment).id,
      offsetM: offsetOf(one),
      startsAt: one.from,
      endsAt: one.until,
      reason: one.reason,
    })),
  )
}

/** Hand instruments with which permits are tested, and when each goes to calibration. */
const TESTERS: readonly (readonly [tag: string, kind: string, facts: string, due: string])[] = [
  ['VT-1', 'voltage tester', 'Two poles, proved on its own source before and after', '2027-03-01'],
  ['IT-1', 'insulation tester', '500 V; measures low resistance as well', '2027-03-01'],
  ['RM-1', 'micro-ohmmeter', '10 A, for bolted joints', '2027-04-15'],
  ['CP-1', 'contact thermometer', 'Probe for bare steel, to 400 °C', '2027-01-20'],
]

/** Valves, pumps with their places, heater circuits, supply sets and loose equipment. */
export async function seedHardware(db: DbOrTx): Promise<void> {
  await seedValves(db)
  await seedPumps(db)
  await db.insert(heaterCircuit).values([
    ...SEGMENTS.map(({ id, short }) => ({
      tag: `DC-${short}`,
      kind: 'direct-current' as const,
      segmentId: id,
      earthing: short === '05' ? 'one point, at the middle anchor (675 m)' : '',
    })),
    ...SEGMENTS.map(({ id, short }) => ({
      tag: `BH-${short}`,
      kind: 'blanket' as const,
      segmentId: id,
      powerW: 6000,
      volts: 230,
      note: 'Valve box, cross and gauges',
    })),
  ])
  await db.insert(supplySet).values(
    ['HX-1', 'HX-2', 'HX-3'].map((tag) => ({
      tag,
      maxAmps: 1500,
      maxVolts: 60,
      openCircuitVolts: 75,
      note:
        { 'HX-1': 'On SG-05', 'HX-2': 'Output locked off (L-109) after the bake of SG-08' }[tag] ?? 'Free',
    })),
  )
  await db.insert(equipment).values([
    {
      tag: 'LD-1',
      kind: 'leak detector',
      facts: 'Smallest leak shown 5×10⁻¹³ Pa·m³/s of helium',
      calibrationDue: at('2027-02-01'),
    },
    {
      tag: 'RG-A',
      kind: 'residual-gas analyser',
      facts: 'On cart MC-D, at SG-06',
      calibrationDue: at('2027-05-15'),
    },
    {
      tag: 'RG-B',
      kind: 'residual-gas analyser',
      facts: 'Of cart MC-B; on the cross of SG-13 for its isolated test',
      calibrationDue: at('2026-12-01'),
    },
    ...TESTERS.map(([tag, kind, facts, due]) => ({ tag, kind, facts, calibrationDue: at(due) })),
    ...LEAKS.flatMap((one, index) =>
      one.temporaryUntil === null
        ? []
        : [
            {
              tag: `TS-${String(index + 1).padStart(2, '0')}`,
              kind: 'temporary seal',
              facts: `On ${one.segment}, ${one.place}, since ${one.mendedAt.toISOString().slice(0, 10)}; to be looked at again by ${one.temporaryUntil.toISOString().slice(0, 10)}`,
              calibrationDue: one.temporaryUntil,
            },
          ],
    ),
    ...Array.from({ length: 10 }, (_, index) => ({
      tag: `OXP-${String(index + 1).padStart(2, '0')}`,
      kind: 'personal oxygen monitor',
      facts: 'Alarm below 19.5 % and above 23.5 %',
      calibrationDue: at(index < 5 ? '2026-12-15' : '2027-03-15'),
    })),
  ])
}
