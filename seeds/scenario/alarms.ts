/** Events about alarms, handovers and reports that later places of the product show. Raw material. */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'
import { SEGMENTS } from '../register/segments.ts'
import { POWER_DIP } from './events.ts'

export interface DemoAlarm {
  at: Date
  tag: string
  text: string
}

const FLOOD_MS = 6 * 60_000
const AFTER = POWER_DIP.at.getTime()
const fell = [
  ...SEGMENTS.flatMap(({ short }) => [`HC-${short}A`, `HC-${short}B`]).map((tag) => ({
    tag,
    text: 'Emission off',
  })),
  ...SEGMENTS.slice(0, 12).map(({ short }) => ({ tag: `IP-${short}`, text: 'Ion pump off' })),
]

/** The flood of the power dip: every hot cathode, and the ion pumps of the first twelve segments, within six minutes. */
export const DIP_ALARMS: readonly DemoAlarm[] = fell.map((one, index) => ({
  ...one,
  at: new Date(AFTER + Math.floor(((index + 0.5) * FLOOD_MS) / fell.length)),
}))

export const HANDOVER_REFUSALS: readonly { at: Date; from: PersonKey; to: PersonKey; reason: string }[] = [
  {
    at: at('2026-02-07 18:40'),
    from: 'pim',
    to: 'corwin',
    reason: 'Two open points on SG-06 are not on the list',
  },
  {
    at: at('2026-07-16 18:50'),
    from: 'odalys',
    to: 'nerys',
    reason: 'Locks of SG-14 were not counted together',
  },
]

export const REVISED_REPORT = {
  month: '2026-03',
  signedAt: at('2026-04-02 10:00'),
  revisedAt: at('2026-04-09 15:30'),
  by: 'magnus' as PersonKey,
  reason: 'Readings of CC-02 from 17 to 18 March were withdrawn: the head had not struck',
} as const
