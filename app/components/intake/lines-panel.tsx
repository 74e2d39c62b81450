/** What became of every line of a file. The six outcomes add up to the lines counted in the bytes. */
import type { LineCounts, LineOutcome, ReadOut, SkipReason } from '#app/domain/night-files/types.ts'
import { QUALITY_LABELS, type Quality } from '#app/domain/readings.ts'
import { Panel } from '../ui/panel.tsx'
import { countOf, countText } from './file-words.ts'

const ROWS: { outcome: LineOutcome; label: string; bar: string }[] = [
  { outcome: 'accepted', label: 'read', bar: 'bg-vac' },
  { outcome: 'flagged', label: 'read, with something to look at', bar: 'bg-warn' },
  { outcome: 'skipped', label: 'left out', bar: 'bg-bad' },
  { outcome: 'note', label: 'notes and blank lines', bar: 'bg-edge' },
  { outcome: 'header', label: 'headers', bar: 'bg-ink-3' },
  { outcome: 'directive', label: 'directives', bar: 'bg-rule' },
]

const SKIP_WORDS: Record<SkipReason, string> = {
  refused: 'file refused',
  unanswered: 'waiting for answers',
  footer: 'totals under the rows',
  duplicate: 'exact repeats',
  'partial-last-line': 'cut last line',
  damaged: 'damaged',
  'field-count': 'wrong number of fields',
  'broken-quote': 'open quotation mark',
  'unreadable-time': 'time that cannot be read',
  'nonexistent-time': 'time left out by the clock change',
  'clock-reset': 'logger clock without its setting',
  'unreadable-value': 'number that cannot be read',
  'unknown-unit': 'unknown unit',
  'no-unit': 'no unit',
  'unknown-word': 'unknown word',
  'unknown-channel': 'unknown channel',
  'left-out': 'channels left out',
  'too-long': 'too long',
}

export function LinesPanel({
  readOut,
  importId,
  heldBefore,
}: {
  readOut: ReadOut
  importId: number
  heldBefore: number
}) {
  const { lines, readings } = readOut
  return (
    <Panel
      title="What was found"
      aside={
        readOut.rejectedTotal > 0 && (
          <a href={`/intake/${importId}/rejected.csv`} className="link inline-block py-1 text-sm">
            {countOf(readOut.rejectedTotal, 'line or cell', 'lines or cells')} turned away, as CSV
          </a>
        )
      }
    >
      <Bar lines={lines} />
      <table className="w-full border-collapse">
        <caption className="sr-only">Lines of the file by what became of them</caption>
        <tbody>
          {ROWS.filter(({ outcome }) => lines[outcome] > 0).map(({ outcome, label, bar }) => (
            <tr key={outcome} className="border-b border-rule-2">
              <td className="w-24 py-1.5 pr-4 text-right font-semibold">{countText(lines[outcome])}</td>
              <th scope="row" className="py-1.5 pr-4 text-left font-normal">
                <span aria-hidden="true" className={`mr-2 inline-block size-2.5 rounded-sm ${bar}`} />
                {label}
              </th>
              <td className="py-1.5 text-ink-2">{detailOf(outcome, lines)}</td>
            </tr>
          ))}
        </tbody>
        <tfoot>
          <tr>
            <td className="py-1.5 pr-4 text-right font-semibold" data-testid="lines-total">
              {countText(lines.total)}
            </td>
            <th scope="row" className="py-1.5 pr-4 text-left font-semibold">
              lines together
            </th>
            <td className="py-1.5 text-ink-2">{countText(lines.counted)} line ends counted in the bytes</td>
          </tr>
        </tfoot>
      </table>
      <p className="mt-3">
        {countOf(readings.total, 'reading', 'readings')}
        {readings.total > 0 && `: ${qualityWords(readings.byQuality)}`}
        {readings.marked > 0 && `; ${countText(readings.marked)} marked`}.
        {heldBefore > 0 &&
          ` For this stretch ${countOf(heldBefore, 'reading is', 'readings are')} held already; equal ones will be left alone, different ones kept beside them.`}
      </p>
    </Panel>
  )
}

function Bar({ lines }: { lines: LineCounts }) {
  const parts = ROWS.filter(({ outcome }) => lines[outcome] > 0)
  return (
    <div
      role="img"
      aria-label={parts.map(({ outcome, label }) => `${countText(lines[outcome])} ${label}`).join(', ')}
      className="mb-3 flex h-5 overflow-hidden rounded-sm bg-rule-2"
    >
      {parts.map(({ outcome, bar }) => (
        <span
          key={outcome}
          className={`min-w-0.5 border-r border-sheet last:border-r-0 ${bar}`}
          style={{ flexGrow: lines[outcome] }}
        />
      ))}
    </div>
  )
}

function detailOf(outcome: LineOutcome, lines: LineCounts): string {
  if (outcome !== 'skipped') return ''
  return Object.entries(lines.skippedBy)
    .map(([reason, count]) => `${countText(count)} ${SKIP_WORDS[reason as SkipReason]}`)
    .join(', ')
}

/** Counts by quality, the good ones first. */
export function qualityWords(byQuality: Partial<Record<Quality, number>>): string {
  return Object.entries(byQuality)
    .sort(([, a], [, b]) => b - a)
    .map(([quality, count]) => `${countText(count)} ${QUALITY_LABELS[quality as Quality]}`)
    .join(', ')
}
