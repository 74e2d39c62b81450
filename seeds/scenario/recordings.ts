/**
 * What the recorder was set up for. Half hours second by second: the beginning of two isolated tests, and one session
 * with the spray gun, 1 800 rows a file. And one night every ten minutes, with the analyser RG-B on a closed segment.
 */
import { at } from '../demo-time.ts'
import type { PersonKey } from '../people.ts'

export interface DemoRecording {
  segment: string
  channels: readonly string[]
  fromAt: Date
  untilAt: Date
  /** Time between its rows. */
  stepSeconds: number
  /** Added to the file's name where one recording of a segment and day is not the only one. */
  suffix?: string
  by: PersonKey
}

/** Oldest first. */
export const RECORDINGS: readonly DemoRecording[] = [
  {
    segment: 'SG-10',
    channels: ['HC-10A', 'HC-10B'],
    fromAt: at('2026-09-16 17:55'),
    untilAt: at('2026-09-16 18:25'),
    stepSeconds: 1,
    by: 'corwin',
  },
  {
    segment: 'SG-06',
    channels: ['CC-06', 'RG-A-04'],
    fromAt: at('2026-11-06 12:40'),
    untilAt: at('2026-11-06 13:10'),
    stepSeconds: 1,
    by: 'odalys',
  },
  {
    segment: 'SG-13',
    channels: ['HC-13A', 'HC-13B'],
    fromAt: at('2026-11-08 19:55'),
    untilAt: at('2026-11-08 20:25'),
    stepSeconds: 1,
    by: 'corwin',
  },
  // Argon tells a leak from hydrogen: air brings it, and the wall has none.
  {
    segment: 'SG-13',
    channels: ['RG-B-02', 'RG-B-40'],
    fromAt: at('2026-11-08 20:00'),
    untilAt: at('2026-11-09 06:00'),
    stepSeconds: 600,
    suffix: 'RG-B',
    by: 'corwin',
  },
]
