/** What people have said about a file, with who and when. */
import type { ReadOut } from '#app/domain/night-files/types.ts'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'

export function AnswersPanel({ readOut }: { readOut: ReadOut }) {
  if (readOut.answers.length === 0) return null
  return (
    <Panel title="Questions answered">
      <dl>
        {readOut.answers.map(({ id, text, label, choice, by, at }) => (
          <div key={id} className="border-b border-rule-2 py-2 first:pt-0 last:border-b-0">
            <dt className="text-ink-2">{text ?? id}</dt>
            <dd className="break-words">
              <span className="font-medium">{label ?? choice}</span>
              {by !== undefined && ` · ${by}`}
              {at !== undefined && (
                <>
                  , <Instant at={new Date(at)} />
                </>
              )}
            </dd>
          </div>
        ))}
      </dl>
    </Panel>
  )
}
