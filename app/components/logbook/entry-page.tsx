/** One entry with everything that was ever written under it. Its own writer may amend it. */
import { Form, Link, useNavigation } from 'react-router'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { type Entry, EntryFacts, EntryText, textInForce } from './entry-text.tsx'

export function EntryPage({
  entry,
  own,
  failure,
}: {
  entry: Entry
  zone: string
  own: boolean
  failure: ActionFailure | undefined
}) {
  const amended = entry.amendments.length > 0
  return (
    <>
      <PageHead
        title={`Log entry ${entry.id}`}
        crumbs={
          <Link to="/logbook" className="link">
            Logbook
          </Link>
        }
      >
        <Instant at={entry.eventAt} show="long" age />
      </PageHead>
      <div className="grid items-start gap-x-4.5 lg:grid-cols-2">
        <div className="min-w-0">
          <Panel title={amended ? 'As amended' : 'Entry'}>
            <EntryText text={textInForce(entry)} />
            <div className="mt-2">
              <EntryFacts entry={entry} linked={false} />
            </div>
          </Panel>
          {amended && <History entry={entry} />}
        </div>
        {/* A new amendment begins from the text it amends. */}
        {own && <AmendPanel key={entry.amendments.length} entry={entry} failure={failure} />}
      </div>
    </>
  )
}

function History({ entry }: { entry: Entry }) {
  return (
    <Panel title="What it said before">
      <ol>
        {entry.amendments
          .map(({ id, reason, writtenAt, author }, at) => ({
            id,
            reason,
            writtenAt,
            author,
            before: entry.amendments[at - 1]?.text ?? entry.text,
          }))
          .reverse()
          .map(({ id, reason, writtenAt, author, before }) => (
            <li key={id} className="border-b border-rule-2 py-2.5 last:border-b-0">
              <p className="text-sm text-ink-3">
                Until <Instant at={writtenAt} />, when {author} amended it: {reason}
              </p>
              <EntryText text={before} />
            </li>
          ))}
      </ol>
    </Panel>
  )
}

function AmendPanel({ entry, failure }: { entry: Entry; failure: ActionFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Panel title="Amend" className="print:hidden">
      <FormFailure failure={failure} />
      <Form method="post">
        <TextAreaField
          name="text"
          label="Text from now on"
          defaultValue={failure?.typed?.text ?? textInForce(entry)}
          required
          minLength={3}
          maxLength={8000}
          errors={failure?.fields.text}
        />
        <TextField
          name="reason"
          label="Why it is amended"
          required
          minLength={5}
          maxLength={500}
          defaultValue={failure?.typed?.reason}
          errors={failure?.fields.reason}
        />
        <TextField
          name="password"
          label="Your password, as your signature"
          type="password"
          autoComplete="current-password"
          required
          errors={failure?.fields.password}
        />
        <Button kind="primary" disabled={sending}>
          {sending ? 'Signing' : 'Sign the amendment'}
        </Button>
      </Form>
    </Panel>
  )
}
