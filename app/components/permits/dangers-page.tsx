/** Every danger of the site that stands open, and those of the last weeks. */
import { Form, Link, useNavigation } from 'react-router'
import { canBeTolerated, SAFETY_EVENT_LABELS } from '#app/domain/safety-events.ts'
import type { SafetyEventRow } from '#app/services/safety-events.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { DangerPanel } from './danger-panel.tsx'

export interface DangersPageProps {
  open: readonly SafetyEventRow[]
  ended: readonly SafetyEventRow[]
  mayTolerate: boolean
  mayState: boolean
  /** The event that the reader came to write about; null for none. */
  chosen: number | null
  failure: ActionFailure | undefined
}

export function DangersPage(props: DangersPageProps) {
  const { open, ended, mayTolerate, mayState } = props
  const heated = open.filter(({ kind }) => canBeTolerated(kind))
  return (
    <>
      <PageHead
        title="Dangers"
        crumbs={
          <Link to="/permits" className="link">
            Permits
          </Link>
        }
      >
        {open.length === 0 ? 'Nothing stands open.' : `${open.length} open.`} Each stays here until its cause
        is gone, whatever becomes of the permit.
      </PageHead>
      <DangerPanel events={open} mayTolerate={mayTolerate} mayState={mayState} />
      {mayTolerate && heated.length > 0 && (
        <Panel title="Write why a heating goes on" id="tolerate" className="scroll-mt-4 print:hidden">
          <TolerateForm {...props} heated={heated} />
        </Panel>
      )}
      <Panel title="Ended in the last thirty days">
        <DataTable
          caption="Dangers that ended, the newest first"
          columns={[
            {
              key: 'kind',
              head: 'What',
              rowHead: true,
              cell: ({ kind, permit, segment }) => (
                <>
                  {SAFETY_EVENT_LABELS[kind]}
                  <span className="block text-sm text-ink-2">{permit ?? segment}</span>
                </>
              ),
            },
            { key: 'from', head: 'From', cell: ({ startedAt }) => <Instant at={startedAt} />, nowrap: true },
            {
              key: 'to',
              head: 'Until',
              cell: ({ endedAt }) => (endedAt === null ? null : <Instant at={endedAt} />),
              nowrap: true,
            },
            {
              key: 'why',
              head: 'How it ended',
              cell: ({ endReason, endedBy, tolerated }) => (
                <>
                  {endReason}
                  {endedBy !== null && ` (${endedBy})`}
                  {tolerated !== null && (
                    <span className="block text-sm text-ink-2">
                      Went on by the word of {tolerated.by}: {tolerated.reason}
                    </span>
                  )}
                </>
              ),
            },
          ]}
          rows={ended}
          rowKey={({ id }) => id}
          empty="None."
        />
      </Panel>
    </>
  )
}

function TolerateForm({ heated, chosen, failure }: DangersPageProps & { heated: readonly SafetyEventRow[] }) {
  const sending = useNavigation().formMethod === 'POST'
  const typed = failure?.typed
  const only = heated.length === 1 ? String(heated[0]?.id) : ''
  return (
    <Form method="post" className="max-w-[46rem]">
      <FormFailure failure={failure} />
      <SelectField
        name="eventId"
        label="Danger"
        required
        defaultValue={typed?.eventId ?? (chosen === null ? only : String(chosen))}
        options={[
          { value: '', label: 'Choose one' },
          ...heated.map(({ id, kind, permit, segment }) => ({
            value: String(id),
            label: `${SAFETY_EVENT_LABELS[kind]}: ${permit ?? segment}`,
          })),
        ]}
        errors={failure?.fields.eventId}
      />
      <TextAreaField
        name="reason"
        label="Why the heating goes on, and who watches it until when"
        hint="The danger stays in sight with your words beside it."
        rows={4}
        required
        defaultValue={typed?.reason}
        errors={failure?.fields.reason}
      />
      <TextField
        name="password"
        label="Your own password, as your signature"
        type="password"
        autoComplete="current-password"
        required
        errors={failure?.fields.password}
      />
      <Button kind="danger" disabled={sending}>
        Sign: it goes on
      </Button>
    </Form>
  )
}
