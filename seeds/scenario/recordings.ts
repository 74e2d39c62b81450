/**
 * Half hours that were followed second by second: the beginning of two isolated tests, and one session with the spray
 * gun. Short and of two channels each, so that they stay small: 1 800 rows a file.
 */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'

export interface DemoRecording {
  segment: string
  channels: readonly string[]
  fromAt: Date
  untilAt: Date
  by: PersonKey
}

/** Oldest first. */
export const RECORDINGS: readonly DemoRecording[] = [
  {
    segment: 'SG-10',
    channels: ['HC-10A', 'HC-10B'],
    fromAt: at('2026-09-16 17:55'),
    untilAt: at('2026-09-16 18:25'),
    by: 'corwin',
  },
  {
    segment: 'SG-06',
    channels: ['CC-06', 'RG-A-04'],
    fromAt: at('2026-11-06 12:40'),
    untilAt: at('2026-11-06 13:10'),
    by: 'odalys',
  },
  {
    segment: 'SG-13',
    channels: ['HC-13A', 'HC-13B'],
    fromAt: at('2026-11-08 19:55'),
    untilAt: at('2026-11-08 20:25'),
    by: 'corwin',
  },
]
