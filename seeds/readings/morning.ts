/** What the gauges say at the end of the last night, Pa nitrogen-equivalent: the state in which the demo is found. */
import { at } from '../demo-time.ts'
import type { AtGauges } from './segment-gas.ts'

/** End of the last night. */
const NIGHT_END = at('2026-11-09 06:00')
export const NIGHT_END_MS = NIGHT_END.getTime()

/** Last row of the logger card that SG-15 hangs on. */
export const SG15_LAST = at('2026-11-08 22:10')

const three = (A: number, B: number, C: number): AtGauges => ({ A, B, C })

/**
 * West end, cross, east end. The gauges of SG-07 and SG-13 stand here as they were before the drift and before the port
 * was shut; those of SG-14 and the spur as they were before the vent. C is 0 where the cold cathode is off.
 */
export const MORNING: Readonly<Record<string, AtGauges>> = {
  'SG-01': three(6.3e-8, 5.1e-8, 6.0e-8),
  'SG-02': three(6.1e-8, 4.9e-8, 6.2e-8),
  'SG-03': three(6.0e-8, 4.9e-8, 6.0e-8),
  'SG-04': three(6.1e-8, 5.2e-8, 6.4e-8),
  'SG-05': three(2.4e-4, 2.1e-4, 0),
  'SG-06': three(1.9e-7, 1.7e-7, 3.1e-7),
  'SG-07': three(5.7e-8, 4.7e-8, 5.5e-8),
  'SG-08': three(3.9e-7, 3.3e-7, 0),
  'SG-09': three(5.6e-8, 4.2e-8, 5.9e-8),
  'SG-10': three(5.9e-8, 4.0e-8, 5.6e-8),
  'SG-11': three(3.4e-5, 2.4e-5, 3.5e-5),
  'SG-12': three(2.6e-7, 2.0e-7, 2.7e-7),
  'SG-13': three(7.0e-8, 5.0e-8, 6.8e-8),
  'SG-14': three(8.2e-8, 6.6e-8, 8.4e-8),
  'SG-15': three(5.7e-8, 4.2e-8, 5.8e-8),
  'SG-16': three(4.1e-7, 3.4e-7, 4.3e-7),
  'SP-1': three(3.1e-8, 2.1e-8, 3.0e-8),
}

/** Twelve hours after the port of SG-13 was shut, typed at 08:00. */
export const SG13_AT_12H = three(7.1e-5, 7.2e-5, 7.0e-5)

/** HC-07A at the end of the last night, far below its neighbours. */
export const HC07A_LOW = 1.8e-8
