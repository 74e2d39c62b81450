/** The sheet that takes the place of the posted permit while work is stopped. */
import { instantText } from '../instant-text.ts'
import type { PaperFacts } from '../permit-sheets.ts'
import type { Sheet } from './blocks.ts'

/** In letters to be read from the next bay; null where work is not stopped. */
export function suspendedSheet(facts: PaperFacts): Sheet | null {
  const { state, stopped, site, number, content, heatingText } = facts
  if (state !== 'suspended') return null
  return {
    key: 'suspended',
    title: 'Suspended',
    blocks: [
      { kind: 'big', text: 'SUSPENDED', size: 76 },
      { kind: 'big', text: number, size: 40 },
      { kind: 'big', text: content.segments.join(' and '), size: 40 },
      { kind: 'big', text: 'No work here. Keep out.', size: 34 },
      ...(stopped === null
        ? []
        : [
            {
              kind: 'facts' as const,
              rows: [
                ['Stopped', `${instantText(stopped.at, site.zone)} by ${stopped.by}`],
                ['Why', stopped.reason],
                ['Made safe', stopped.madeSafe ?? 'Nobody has recorded that it was made safe.'],
                ['Heating', heatingText],
              ] as [string, string][],
            },
          ]),
      {
        kind: 'notice',
        title: 'Post this sheet in place of the permit at every barrier',
        text: 'Take the posted copies down. Count the tube as hot and the bars as live until somebody has measured. Only a safety officer lets work go on; this sheet comes down then, and not before.',
      },
    ],
  }
}
