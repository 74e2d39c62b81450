/** Which segments the table on Line lists, in which order, and what it says about each. Plain functions, so that they can be tested without a browser. */

import { SEGMENT_STATES } from '#app/domain/segment-states.ts'
import type { LineSegment, Trend } from '#app/services/line-page.server.ts'

export const SHOWN = [
  'all',
  'attention',
  'at-target',
  'over-target',
  'heated',
  'unknown',
  'questioned',
] as const
export type Shown = (typeof SHOWN)[number]

export const SHOWN_LABELS: Record<Shown, string> = {
  all: 'All',
  attention: 'Needs attention',
  'at-target': 'At target',
  'over-target': 'Over target',
  heated: 'Heated',
  unknown: 'Unknown',
  questioned: 'Questioned',
}

/** Whether a segment belongs to a list. */
export function belongs(segment: LineSegment, shown: Shown): boolean {
  switch (shown) {
    case 'all':
      return true
    case 'attention':
      return attentionOf(segment) !== null
    case 'at-target':
      return segment.verdict === 'at-target'
    case 'over-target':
      return segment.verdict === 'above-target' || segment.verdict === 'over-limit'
    case 'heated':
      return SEGMENT_STATES[segment.state].hot
    case 'unknown':
      return segment.verdict === 'unknown'
    case 'questioned':
      return segment.questions.length > 0
  }
}

/** Reads the list asked for in the address; anything else is all of them. */
export function readShown(text: string): Shown {
  return (SHOWN as readonly string[]).includes(text) ? (text as Shown) : 'all'
}

export interface Attention {
  tone: 'bad' | 'warn' | 'heat' | 'plain'
  text: string
}

/** The one thing to know about a segment this morning; null when there is none. */
export function attentionOf(segment: LineSegment): Attention | null {
  if (segment.verdict === 'over-limit') return { tone: 'bad', text: 'Over the operating limit' }
  if (segment.verdict === 'unknown') return { tone: 'warn', text: whyUnknown(segment) }
  const question = segment.questions[0]
  if (question !== undefined) return { tone: 'warn', text: question.text }
  if (segment.verdict === 'above-target') return { tone: 'warn', text: 'Above target, within the limit' }
  if (SEGMENT_STATES[segment.state].hot) {
    const { permits } = segment
    if (permits !== null && !permits.some(({ state }) => state === 'issued'))
      return { tone: 'bad', text: 'Hot, and no live permit covers it' }
    return { tone: 'heat', text: 'Hot: surfaces may burn. Go by contact readings on site.' }
  }
  return null
}

function whyUnknown(segment: LineSegment): string {
  const gauge = segment.gauges.find(({ tag }) => tag === segment.headline?.tag) ?? segment.gauges[0]
  if (gauge === undefined) return 'No gauge in the register'
  if (gauge.at === null) return `${gauge.tag}: no usable reading yet`
  return `No fresh reading; do not take the last one for the present`
}

/** A segment's trend by its tag. */
export function trendOf(trends: readonly Trend[], tag: string): Trend | null {
  return trends.find((trend) => trend.tag === tag) ?? null
}
