/** What the crews wrote down in the last four weeks of the demo, besides rounds and handovers. */

import type { EntryKind } from '../../app/domain/logbook.ts'
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'
import type { DemoEntry } from './entry.ts'

interface WrittenEntry {
  segment: string | null
  kind: EntryKind
  event: string
  written: string
  by: PersonKey
  text: string
  amended?: { written: string; text: string; reason: string }
}

const WRITTEN: readonly WrittenEntry[] = [
  {
    segment: null,
    kind: 'note',
    event: '2026-10-20 10:40',
    written: '2026-10-20 15:20',
    by: 'nerys',
    text: 'Cable duct between VB-03 and VB-04 renewed. Gauge cables of SG-03 and SG-04 were unplugged from 09:30 and are all back in by 10:40.',
  },
  {
    segment: 'SG-03',
    kind: 'valve',
    event: '2026-10-21 09:12',
    written: '2026-10-21 09:30',
    by: 'nerys',
    text: 'GV-03 shut for two minutes to try its new limit switch, open again. Nothing to see at the gauges.',
  },
  {
    segment: 'SG-11',
    kind: 'vent',
    event: '2026-10-26 08:10',
    written: '2026-10-26 08:50',
    by: 'pim',
    text: 'Vented with air through NV-11 for the bellows at the west end. GV-10 and GV-11 shut and locked before.',
  },
  {
    segment: 'SP-1',
    kind: 'vent',
    event: '2026-10-28 08:45',
    written: '2026-10-28 09:40',
    by: 'odalys',
    text: 'Spur vented with dry nitrogen. Oxygen in the cellar stayed at 20.7 %, fan on throughout.',
  },
  {
    segment: 'SG-14',
    kind: 'gauge',
    event: '2026-10-29 07:50',
    written: '2026-10-29 08:05',
    by: 'corwin',
    text: 'HC-14A jumps by a tenth from row to row since yesterday; second filament does the same. HC-14B and CC-14 are calm.',
  },
  {
    segment: 'SG-06',
    kind: 'note',
    event: '2026-10-31 03:00',
    written: '2026-10-31 09:20',
    by: 'odalys',
    text: 'All three gauges stepped up within the hour after 03:00, CC-06 most. Nobody was in the tunnel. Set to leak hunt.',
  },
  {
    segment: 'SG-08',
    kind: 'pump',
    event: '2026-11-01 09:50',
    written: '2026-11-01 10:05',
    by: 'corwin',
    text: 'MC-C pumps on SG-08, getter pump valved off. Called in on a Sunday together with Nerys.',
  },
  {
    segment: 'SG-08',
    kind: 'heat',
    event: '2026-11-01 10:20',
    written: '2026-11-01 10:35',
    by: 'corwin',
    text: 'HX-2 on, ramp of ten degrees an hour. All barriers up, lamps on at both ends.',
  },
  {
    segment: 'SG-08',
    kind: 'heat',
    event: '2026-11-01 23:30',
    written: '2026-11-01 23:40',
    by: 'nerys',
    text: 'All twelve thermocouples above 140 °C, soak begins. 1.8×10⁻³ Pa at the cross.',
    amended: {
      written: '2026-11-02 06:50',
      text: 'All twelve thermocouples above 140 °C, soak begins. 1.7×10⁻³ Pa at the cross.',
      reason: 'Looked at the wrong row of the log',
    },
  },
  {
    segment: 'SG-06',
    kind: 'leak-check',
    event: '2026-11-02 11:00',
    written: '2026-11-02 14:10',
    by: 'odalys',
    text: 'Helium along the joints from 825 to 860 m with LD-1 on the cross: no answer. Argon on RG-A is three times what it was in October.',
  },
  {
    segment: null,
    kind: 'gauge',
    event: '2026-11-03 01:12',
    written: '2026-11-03 07:05',
    by: 'pim',
    text: 'West logger restarted by itself in the night and wrote a new heading. Since the new file at 06:00 its columns stand as before.',
  },
  {
    segment: 'SG-05',
    kind: 'test',
    event: '2026-11-04 17:30',
    written: '2026-11-04 17:50',
    by: 'pim',
    text: 'Resistance end to end 19.1 mΩ, to earth open. Each thermocouple warmed by hand and seen at its own channel.',
  },
  {
    segment: 'SG-05',
    kind: 'heat',
    event: '2026-11-04 20:00',
    written: '2026-11-04 20:10',
    by: 'corwin',
    text: 'HX-1 on, ramp of ten degrees an hour. MC-A pumps, cold cathode switched off.',
  },
  {
    segment: 'SG-05',
    kind: 'heat',
    event: '2026-11-05 09:12',
    written: '2026-11-05 09:20',
    by: 'pim',
    text: 'Soak begins at 1 083 A and 23.4 V. GV-04 bonnet at 104 °C.',
  },
  {
    segment: 'SG-14',
    kind: 'vent',
    event: '2026-11-05 07:30',
    written: '2026-11-05 08:10',
    by: 'pim',
    text: 'Vented with dry nitrogen. GV-13 and GV-14 shut and locked, keys in the box at VB-13.',
  },
  {
    segment: 'SG-14',
    kind: 'gauge',
    event: '2026-11-05 14:20',
    written: '2026-11-05 14:45',
    by: 'odalys',
    text: 'HC-14A: Q-7741 out, Q-8120 in, new gasket. Flange stays under nitrogen until the leak check.',
  },
  {
    segment: 'SG-11',
    kind: 'pump',
    event: '2026-11-06 09:40',
    written: '2026-11-06 09:55',
    by: 'pim',
    text: 'Closed up after the new bellows, RS-2 started. All flanges torqued twice.',
  },
  {
    segment: 'SG-11',
    kind: 'valve',
    event: '2026-11-06 14:00',
    written: '2026-11-06 14:15',
    by: 'pim',
    text: 'Crossed over to MC-B at 4 Pa, RS-2 valved off and stopped. Hot cathodes on at 14:05.',
  },
  {
    segment: 'SG-06',
    kind: 'leak-check',
    event: '2026-11-06 10:30',
    written: '2026-11-06 13:40',
    by: 'odalys',
    text: 'Joints from 860 to 890 m bagged one after the other: a slow answer at the last bag, not clear enough to call. East end is next, from 890 m.',
  },
  {
    segment: 'SG-16',
    kind: 'note',
    event: '2026-11-06 15:00',
    written: '2026-11-06 15:20',
    by: 'bram',
    text: 'Creeps up by about six per cent a week since September. Last baked in 2015 and never fired; goes to the end of the spring plan.',
  },
  {
    segment: 'SG-13',
    kind: 'test',
    event: '2026-11-08 20:00',
    written: '2026-11-08 20:10',
    by: 'corwin',
    text: 'PV-13 shut for an isolated test over night, logger set to a row a minute, RG-B on the cross to watch argon.',
  },
  {
    segment: 'SG-08',
    kind: 'heat',
    event: '2026-11-08 23:30',
    written: '2026-11-08 23:40',
    by: 'corwin',
    text: 'A week of soak done. HX-2 off, output locked with L-109. Left to cool by itself.',
  },
  {
    segment: 'SG-05',
    kind: 'round',
    event: '2026-11-09 06:55',
    written: '2026-11-09 07:10',
    by: 'pim',
    text: 'TH-05-09 has been low since 02:14 and the spread is 24 °C. Insulation seems to have slipped near 706 m; not touched.',
  },
  {
    segment: 'SG-08',
    kind: 'round',
    event: '2026-11-09 07:30',
    written: '2026-11-09 07:38',
    by: 'odalys',
    text: 'Hottest point by contact probe 74 °C, at the flange at 1 195 m. Barriers stay.',
  },
  {
    segment: 'SP-1',
    kind: 'pump',
    event: '2026-11-09 07:40',
    written: '2026-11-09 07:50',
    by: 'pim',
    text: 'RS-1 started at the far end of the spur, away from SG-08.',
  },
  {
    segment: null,
    kind: 'handover',
    event: '2026-11-09 06:45',
    written: '2026-11-09 06:58',
    by: 'corwin',
    text: 'To crew A: SG-08 cools, SG-13 isolated since 20:00, SG-05 in its fourth day of soak. Last file of the west logger is still to be taken in.',
  },
]

/** Entries of the last weeks. */
export const LAST_WEEKS: readonly DemoEntry[] = WRITTEN.map(({ event, written, amended, ...rest }) => ({
  ...rest,
  eventAt: at(event),
  writtenAt: at(written),
  ...(amended === undefined ? {} : { amended: { ...amended, writtenAt: at(amended.written) } }),
}))
