/** What happened to the tube in fourteen months besides bakes: leaks, vents, exchanged gauges, tests, the power dip. */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'

export interface DemoLeak {
  segment: string
  kind: 'gasket' | 'weld' | 'valve' | 'feedthrough'
  /** Words for the place. */
  place: string
  /** Metres from the segment's west end. */
  offsetM: number
  /** Air that comes in, Pa·m³/s. */
  sizePaM3S: number
  opensAt: Date
  foundAt: Date
  mendedAt: Date
  remedy: string
  by: PersonKey
  /** Sealed from outside and to be made good at the next vent. */
  temporaryUntil: Date | null
}

const leak = (
  one: Omit<DemoLeak, 'opensAt' | 'foundAt' | 'mendedAt' | 'temporaryUntil'> & {
    opens: string
    found: string
    mended: string
    temporaryUntil?: string
  },
): DemoLeak => {
  const { opens, found, mended, temporaryUntil, ...rest } = one
  return {
    ...rest,
    opensAt: at(opens),
    foundAt: at(found),
    mendedAt: at(mended),
    temporaryUntil: temporaryUntil === undefined ? null : at(temporaryUntil),
  }
}

/** The eleven that were found, oldest first. The twelfth, in SG-06, is still being looked for. */
export const LEAKS: readonly DemoLeak[] = [
  leak({
    segment: 'SG-15',
    kind: 'gasket',
    place: 'flange of HC-15A',
    offsetM: 1,
    sizePaM3S: 4e-8,
    opens: '2025-09-22 13:00',
    found: '2025-09-25 10:40',
    mended: '2025-10-16 15:30',
    remedy: 'new gasket while the segment was vented',
    by: 'odalys',
  }),
  leak({
    segment: 'SG-04',
    kind: 'gasket',
    place: 'flange of PV-04',
    offsetM: 75,
    sizePaM3S: 1.5e-8,
    opens: '2025-12-03 21:00',
    found: '2025-12-05 11:15',
    mended: '2025-12-05 14:20',
    remedy: 'bolts drawn up in turn, answer gone',
    by: 'odalys',
  }),
  leak({
    segment: 'SG-06',
    kind: 'feedthrough',
    place: 'thermocouple feedthrough at the cross',
    offsetM: 76,
    sizePaM3S: 2e-7,
    opens: '2026-01-12 16:00',
    found: '2026-01-14 09:50',
    mended: '2026-01-21 13:10',
    remedy: 'feedthrough exchanged while the segment was vented',
    by: 'odalys',
  }),
  leak({
    segment: 'SG-12',
    kind: 'gasket',
    place: 'flange of CC-12',
    offsetM: 149,
    sizePaM3S: 2.4e-8,
    opens: '2026-02-23 04:00',
    found: '2026-02-24 13:30',
    mended: '2026-02-24 15:00',
    remedy: 'bolts drawn up, answer gone',
    by: 'nerys',
  }),
  leak({
    segment: 'SG-02',
    kind: 'gasket',
    place: 'flange of CC-02',
    offsetM: 149,
    sizePaM3S: 3e-8,
    opens: '2026-03-17 10:00',
    found: '2026-03-20 10:05',
    mended: '2026-03-20 11:40',
    remedy: 'bolts drawn up after the exchange of the gauge head',
    by: 'odalys',
  }),
  leak({
    segment: 'SG-13',
    kind: 'valve',
    place: 'seat of NV-13',
    offsetM: 2,
    sizePaM3S: 6e-8,
    opens: '2026-04-08 09:30',
    found: '2026-04-10 14:45',
    mended: '2026-04-13 10:30',
    remedy: 'valve opened against dry nitrogen and shut again by the torque spanner',
    by: 'pim',
  }),
  leak({
    segment: 'SG-09',
    kind: 'gasket',
    place: 'flange of bellows 7',
    offsetM: 97,
    sizePaM3S: 5e-8,
    opens: '2026-06-09 22:30',
    found: '2026-06-11 10:20',
    mended: '2026-06-11 15:45',
    remedy: 'sealed from outside for the time being',
    by: 'odalys',
    temporaryUntil: '2026-10-01',
  }),
  leak({
    segment: 'SG-14',
    kind: 'weld',
    place: 'circumferential weld at 2 012 m',
    offsetM: 62,
    sizePaM3S: 1.2e-8,
    opens: '2026-07-19 10:00',
    found: '2026-07-21 13:10',
    mended: '2026-07-21 16:20',
    remedy: 'sealed from outside for the time being',
    by: 'odalys',
    temporaryUntil: '2027-01-15',
  }),
  leak({
    segment: 'SG-10',
    kind: 'weld',
    place: 'weld of the pump cross',
    offsetM: 75,
    sizePaM3S: 1e-5,
    opens: '2026-08-19 11:00',
    found: '2026-08-20 09:30',
    mended: '2026-08-27 12:00',
    remedy: 'ground out and welded anew while the segment was vented',
    by: 'bram',
  }),
  leak({
    segment: 'SG-01',
    kind: 'gasket',
    place: 'flange of HC-01A',
    offsetM: 1,
    sizePaM3S: 1.1e-8,
    opens: '2026-09-24 02:00',
    found: '2026-09-25 11:20',
    mended: '2026-09-25 13:00',
    remedy: 'bolts drawn up, answer gone',
    by: 'nerys',
  }),
  leak({
    segment: 'SG-07',
    kind: 'gasket',
    place: 'flange of TC-07',
    offsetM: 70,
    sizePaM3S: 9e-9,
    opens: '2026-10-05 12:00',
    found: '2026-10-08 09:40',
    mended: '2026-10-08 11:10',
    remedy: 'bolts drawn up, answer gone',
    by: 'corwin',
  }),
]

/** East end of SG-06, about 898 m: not found yet. */
export const OPEN_LEAK = {
  segment: 'SG-06',
  offsetM: 148,
  sizePaM3S: 5e-8,
  opensAt: at('2026-10-31 03:00'),
} as const

export interface DemoVent {
  segment: string
  gas: 'air' | 'dry nitrogen'
  ventedAt: Date
  /** Pumping begins with a roughing set; null while it is open. */
  roughingAt: Date | null
  roughingSet: 'RS-1' | 'RS-2'
  /** High vacuum begins; null before. */
  pumpingAt: Date | null
  reason: string
  by: PersonKey
}

/** Vents, oldest first. */
export const VENTS: readonly DemoVent[] = [
  {
    segment: 'SG-15',
    gas: 'dry nitrogen',
    ventedAt: at('2025-10-14 08:20'),
    roughingAt: at('2025-10-20 08:40'),
    roughingSet: 'RS-2',
    pumpingAt: at('2025-10-20 12:50'),
    reason: 'Dry nitrogen, for the gasket and gauge of the west end',
    by: 'pim',
  },
  {
    segment: 'SG-06',
    gas: 'dry nitrogen',
    ventedAt: at('2026-01-19 08:10'),
    roughingAt: at('2026-01-23 08:30'),
    roughingSet: 'RS-1',
    pumpingAt: at('2026-01-23 13:10'),
    reason: 'Dry nitrogen, to exchange the feedthrough at the cross',
    by: 'corwin',
  },
  {
    segment: 'SG-10',
    gas: 'dry nitrogen',
    ventedAt: at('2026-08-24 08:05'),
    roughingAt: at('2026-08-28 08:15'),
    roughingSet: 'RS-2',
    pumpingAt: at('2026-08-28 12:20'),
    reason: 'Dry nitrogen, to weld the cross anew',
    by: 'pim',
  },
  {
    segment: 'SG-11',
    gas: 'air',
    ventedAt: at('2026-10-26 08:10'),
    roughingAt: at('2026-11-06 09:40'),
    roughingSet: 'RS-2',
    pumpingAt: at('2026-11-06 14:00'),
    reason: 'Air, to exchange the bellows at the west end',
    by: 'pim',
  },
  {
    segment: 'SP-1',
    gas: 'dry nitrogen',
    ventedAt: at('2026-10-28 08:45'),
    roughingAt: at('2026-11-09 07:40'),
    roughingSet: 'RS-1',
    pumpingAt: null,
    reason: 'Dry nitrogen, for the new window in the cellar',
    by: 'odalys',
  },
  {
    segment: 'SG-14',
    gas: 'dry nitrogen',
    ventedAt: at('2026-11-05 07:30'),
    roughingAt: null,
    roughingSet: 'RS-1',
    pumpingAt: null,
    reason: 'Dry nitrogen, to exchange gauge HC-14A; GV-13 and GV-14 locked',
    by: 'pim',
  },
]

export interface DemoExchange {
  position: string
  newSerial: string
  at: Date
  /** How much more the old one said than the new one, as a factor. */
  oldOverNew: number
  oldNote: string
  reason: string
  by: PersonKey
}

/** Exchanged gauges, oldest first. */
export const EXCHANGES: readonly DemoExchange[] = [
  {
    position: 'HC-15A',
    newSerial: 'Q-8111',
    at: at('2025-10-16 14:10'),
    oldOverNew: 1.09,
    oldNote: 'First filament burnt out in September 2025; taken out on 2025-10-16',
    reason: 'One filament left; exchanged with the gasket',
    by: 'odalys',
  },
  {
    position: 'HC-06B',
    newSerial: 'Q-8112',
    at: at('2026-01-21 11:30'),
    oldOverNew: 0.91,
    oldNote: 'Taken out for calibration on 2026-01-21',
    reason: 'Calibration was due and the segment open',
    by: 'corwin',
  },
  {
    position: 'CC-02',
    newSerial: 'K-4431',
    at: at('2026-03-18 13:20'),
    oldOverNew: 1.12,
    oldNote: 'Supply of the head broken by the power dip of 2026-03-17',
    reason: 'Head did not strike again after the power dip',
    by: 'nerys',
  },
  {
    position: 'TC-S1',
    newSerial: 'W-2131',
    at: at('2026-05-06 10:15'),
    oldOverNew: 1,
    oldNote: 'Zero wandered; taken out on 2026-05-06',
    reason: 'Zero wandered from day to day',
    by: 'odalys',
  },
  {
    position: 'HC-10A',
    newSerial: 'Q-8113',
    at: at('2026-08-26 10:40'),
    oldOverNew: 1.06,
    oldNote: 'Insulator darkened; taken out on 2026-08-26',
    reason: 'Insulator darkened; exchanged while the segment was open',
    by: 'nerys',
  },
  {
    position: 'HC-14A',
    newSerial: 'Q-8120',
    at: at('2026-11-05 14:20'),
    oldOverNew: 1.05,
    oldNote: 'Filament flickered from the end of October; taken out on 2026-11-05',
    reason: 'Old gauge flickered; exchanged while the segment was open',
    by: 'odalys',
  },
]

/** All supplies of the site were away for a moment; gauges tripped and came back one by one. */
export const POWER_DIP = {
  at: at('2026-03-17 09:14'),
  gaugesBackAt: at('2026-03-17 10:20'),
  /** By how much the pressures had gone up when the ion pumps were back. */
  rise: 2.2,
  hoursToSettle: 3,
} as const

/** Isolated tests with the pump port shut, oldest first; the last goes on. */
export const ISOLATIONS: readonly {
  segment: string
  fromAt: Date
  untilAt: Date | null
  /** A gauge filament came on in the middle, and with it its own gas. */
  filamentAt?: Date
}[] = [
  { segment: 'SG-15', fromAt: at('2025-11-12 18:00'), untilAt: at('2025-11-13 08:00') },
  { segment: 'SG-06', fromAt: at('2026-02-13 18:00'), untilAt: at('2026-02-14 09:00') },
  { segment: 'SG-10', fromAt: at('2026-09-16 18:00'), untilAt: at('2026-09-17 08:00') },
  {
    segment: 'SG-11',
    fromAt: at('2026-10-20 18:00'),
    untilAt: at('2026-10-21 07:00'),
    filamentAt: at('2026-10-20 23:40'),
  },
  { segment: 'SG-12', fromAt: at('2026-10-29 18:00'), untilAt: at('2026-10-30 07:00') },
  { segment: 'SG-16', fromAt: at('2026-11-04 18:00'), untilAt: at('2026-11-05 07:00') },
  { segment: 'SG-13', fromAt: at('2026-11-08 20:00'), untilAt: null },
]
