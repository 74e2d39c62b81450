/** Readings that somebody read from an instrument and typed in. */
import { at } from '../demo-time.ts'
import { channelId } from '../register/sources.ts'
import type { StoredReading } from './load.ts'

const TYPED: readonly { at: string; values: Record<string, number> }[] = [
  {
    at: '2026-11-09 08:00',
    values: {
      'HC-11A': 3.4e-5,
      'HC-11B': 2.4e-5,
      'CC-11': 3.5e-5,
      'HC-13A': 7.1e-5,
      'HC-13B': 7.2e-5,
      'CC-13': 7.0e-5,
      'TC-S1': 38,
    },
  },
  // Scales of SG-08 while it cools, and of SG-05 while it is hot.
  { at: '2026-11-08 16:20', values: { 'BX-05-01': 33, 'BX-05-05': 34, 'BX-05-10': 33 } },
  { at: '2026-11-08 16:40', values: { 'BX-08-01': 36, 'BX-08-05': 35, 'BX-08-10': 36 } },
  { at: '2026-11-09 07:30', values: { 'TH-08-12': 74 } },
]

/** Typed readings as rows; they belong to no file, so their import and line are 0. */
export function typedReadings(): StoredReading[] {
  return TYPED.flatMap(({ at: when, values }) =>
    Object.entries(values).map(([name, value]) => ({
      channelId: channelId('HAND', name),
      atMs: at(when).getTime(),
      seq: 0,
      value,
      bound: null,
      quality: 'manual' as const,
      marks: 0,
      importId: 0,
      lineNo: 0,
    })),
  )
}
