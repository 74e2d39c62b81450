/** Bakes of the demo, the two of the present and those before. Everything that follows from one is made from here. */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'

export interface DemoBake {
  segment: string
  supply: 'HX-1' | 'HX-2' | 'HX-3'
  cart: 'MC-A' | 'MC-B' | 'MC-C' | 'MC-D'
  /** Fitting of bars, thermocouples and blankets begins. */
  prepAt: Date
  /** The cart takes over from the pump at the cross. */
  cartAt: Date
  rampAt: Date
  /** Start of the soak; null where the ramp was broken off. */
  soakAt: Date | null
  /** Heating off; null while it is on. */
  offAt: Date | null
  /** Cold, back on the pump at the cross; null while it is hot. */
  coldAt: Date | null
  inServiceAt: Date | null
  outcome: 'running' | 'complete' | 'supply trip' | 'spread'
  rampReason: string
  lead: PersonKey
  second: PersonKey
}

const bake = (
  one: Omit<DemoBake, 'prepAt' | 'cartAt' | 'rampAt' | 'soakAt' | 'offAt' | 'coldAt' | 'inServiceAt'> & {
    prep: string
    cartOn: string
    ramp: string
    soak: string | null
    off: string | null
    cold: string | null
    inService: string | null
  },
): DemoBake => {
  const { prep, cartOn, ramp, soak, off, cold, inService, ...rest } = one
  const maybe = (text: string | null) => (text === null ? null : at(text))
  return {
    ...rest,
    prepAt: at(prep),
    cartAt: at(cartOn),
    rampAt: at(ramp),
    soakAt: maybe(soak),
    offAt: maybe(off),
    coldAt: maybe(cold),
    inServiceAt: maybe(inService),
  }
}

/** Oldest first. */
export const BAKES: readonly DemoBake[] = [
  bake({
    segment: 'SG-15',
    supply: 'HX-3',
    cart: 'MC-A',
    prep: '2025-10-29 07:30',
    cartOn: '2025-11-03 14:10',
    ramp: '2025-11-03 18:00',
    soak: '2025-11-04 07:15',
    off: '2025-11-11 08:00',
    cold: '2025-11-12 09:30',
    inService: '2025-11-14 09:00',
    outcome: 'complete',
    rampReason: 'HX-3 on, ten degrees an hour',
    lead: 'pim',
    second: 'odalys',
  }),
  bake({
    segment: 'SG-06',
    supply: 'HX-2',
    cart: 'MC-C',
    prep: '2026-02-02 07:30',
    cartOn: '2026-02-04 15:20',
    ramp: '2026-02-04 18:00',
    soak: '2026-02-05 07:40',
    off: '2026-02-12 08:00',
    cold: '2026-02-13 10:00',
    inService: '2026-02-16 09:00',
    outcome: 'complete',
    rampReason: 'HX-2 on',
    lead: 'corwin',
    second: 'pim',
  }),
  bake({
    segment: 'SG-09',
    supply: 'HX-3',
    cart: 'MC-B',
    prep: '2026-05-18 07:30',
    cartOn: '2026-05-20 15:00',
    ramp: '2026-05-20 18:00',
    soak: null,
    off: '2026-05-21 03:26',
    cold: '2026-05-22 09:10',
    inService: '2026-05-26 09:00',
    outcome: 'supply trip',
    rampReason: 'HX-3 on, first of two nights of ramp',
    lead: 'nerys',
    second: 'corwin',
  }),
  bake({
    segment: 'SG-14',
    supply: 'HX-3',
    cart: 'MC-D',
    prep: '2026-07-13 07:30',
    cartOn: '2026-07-15 14:40',
    ramp: '2026-07-15 18:00',
    soak: '2026-07-16 07:30',
    off: '2026-07-17 15:40',
    cold: '2026-07-18 16:30',
    inService: '2026-07-22 09:00',
    outcome: 'spread',
    rampReason: 'HX-3 on, ten degrees an hour',
    lead: 'odalys',
    second: 'pim',
  }),
  bake({
    segment: 'SG-10',
    supply: 'HX-3',
    cart: 'MC-A',
    prep: '2026-09-03 07:30',
    cartOn: '2026-09-07 14:30',
    ramp: '2026-09-07 17:00',
    soak: '2026-09-08 06:30',
    off: '2026-09-15 09:30',
    cold: '2026-09-16 11:00',
    inService: '2026-09-18 09:00',
    outcome: 'complete',
    rampReason: 'HX-3 on',
    lead: 'corwin',
    second: 'nerys',
  }),
  bake({
    segment: 'SG-08',
    supply: 'HX-2',
    cart: 'MC-C',
    prep: '2026-10-28 07:30',
    cartOn: '2026-11-01 09:50',
    ramp: '2026-11-01 10:20',
    soak: '2026-11-01 23:30',
    off: '2026-11-08 23:30',
    cold: null,
    inService: null,
    outcome: 'running',
    rampReason: 'HX-2 on; pair on call came in',
    lead: 'corwin',
    second: 'nerys',
  }),
  bake({
    segment: 'SG-05',
    supply: 'HX-1',
    cart: 'MC-A',
    prep: '2026-11-02 07:30',
    cartOn: '2026-11-04 19:30',
    ramp: '2026-11-04 20:00',
    soak: '2026-11-05 09:12',
    off: null,
    cold: null,
    inService: null,
    outcome: 'running',
    rampReason: 'HX-1 on, ten degrees an hour',
    lead: 'corwin',
    second: 'pim',
  }),
]

/** A stop in the middle of a soak: the fan of a supply failed and the tube cooled by a little. */
export const FAN_STOP = {
  segment: 'SG-10',
  fromAt: at('2026-09-11 11:20'),
  untilAt: at('2026-09-11 14:20'),
} as const

/** Bakes of a segment, oldest first. */
export function bakesOf(segment: string): DemoBake[] {
  return BAKES.filter((one) => one.segment === segment)
}
