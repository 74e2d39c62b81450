import type { ImportState } from '#app/domain/imports.ts'
import type { NightRow } from '#app/services/intake-pages.server.ts'

export type TagTone = 'plain' | 'good' | 'warn' | 'bad'

const TONES: Record<TagTone, string> = {
  plain: 'bg-rule-2 text-ink-2',
  good: 'bg-vac-soft text-vac',
  warn: 'bg-warn-soft text-warn',
  bad: 'bg-bad-soft text-bad',
}

/** A word on a tint. The word says it all; the tint only helps to find it. */
export function StateTag({ word, tone }: { word: string; tone: TagTone }) {
  return (
    <span className={`inline-block rounded-sm px-2 py-0.5 text-sm whitespace-nowrap ${TONES[tone]}`}>
      {word}
    </span>
  )
}

export const NIGHT_WORDS: Record<NightRow['state'], { word: string; tone: TagTone }> = {
  'taken-in': { word: 'taken in', tone: 'good' },
  waiting: { word: 'read, not taken in', tone: 'warn' },
  reading: { word: 'being read', tone: 'plain' },
  refused: { word: 'came, refused', tone: 'bad' },
  expected: { word: 'not due yet', tone: 'plain' },
  missing: { word: 'missing', tone: 'bad' },
  silent: { word: 'no file ever came', tone: 'plain' },
}

export const TONE_OF_STATE: Record<ImportState, TagTone> = {
  reading: 'plain',
  read: 'warn',
  refused: 'bad',
  accepted: 'good',
  discarded: 'plain',
  withdrawn: 'plain',
}
