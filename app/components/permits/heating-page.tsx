/** What is known about a heating, and the form in which somebody says that it is on or off. */
import { Form, Link, useNavigation } from 'react-router'
import type { HeatingPanel } from '#app/services/heating.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { SelectField, TextAreaField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

export interface HeatingPageProps extends HeatingPanel {
  segments: readonly string[]
  /** The permit or segment that it is about. */
  back: { to: string; name: string }
  mayState: boolean
  now: Date
  zone: string
  failure: ActionFailure | undefined
}

export function HeatingPage(props: HeatingPageProps) {
  const { fact, statements, segments, back, mayState } = props
  const tone = fact.on === true ? 'heat' : fact.on === null ? 'warn' : 'plain'
  return (
    <>
      <PageHead
        title={`Heating of ${segments.join(' and ')}`}
        crumbs={
          <>
            <Link to="/permits" className="link">
              Permits
            </Link>
            {' / '}
            <Link to={back.to} className="link">
              {back.name}
            </Link>
          </>
        }
      >
        A fact of its own, whatever state a permit is in. Ebbline reads it and writes it down; it switches
        nothing.
      </PageHead>
      <Notice tone={tone} lead={fact.on === true ? 'On. ' : fact.on === null ? 'Not known. ' : 'Off. '}>
        {fact.text}
        {fact.since !== null && (
          <>
            {' '}
            So since <Instant at={fact.since} />.
          </>
        )}
      </Notice>
      {mayState && (
        <Panel title="Say what you found" className="print:hidden">
          <StatementForm {...props} />
        </Panel>
      )}
      <Panel title="What was said">
        <DataTable
          caption="Statements about this heating, the newest first"
          columns={[
            { key: 'at', head: 'When', cell: ({ at }) => <Instant at={at} />, nowrap: true },
            { key: 'segment', head: 'Segment', cell: ({ segment }) => segment, rowHead: true },
            { key: 'on', head: 'Heating', cell: ({ on }) => <strong>{on ? 'on' : 'off'}</strong> },
            {
              key: 'how',
              head: 'How it is known',
              cell: ({ how, supply }) => (supply === null ? how : `${supply}: ${how}`),
            },
            { key: 'by', head: 'By', cell: ({ by }) => by },
          ]}
          rows={statements}
          rowKey={({ segment, recordedAt, at }) => `${segment} ${at.getTime()} ${recordedAt.getTime()}`}
          empty="Nobody has said anything."
        />
      </Panel>
    </>
  )
}

function StatementForm({ supplies, now, zone, failure }: HeatingPageProps) {
  const sending = useNavigation().formMethod === 'POST'
  const typed = failure?.typed
  const errors = failure?.fields
  return (
    <Form method="post" className="max-w-[46rem]">
      <FormFailure failure={failure} />
      <fieldset className="mb-4" aria-describedby={errors?.on === undefined ? undefined : 'on-error'}>
        <legend className="mb-1 font-medium">The heating is</legend>
        <div className="flex flex-wrap gap-3">
          {(['off', 'on'] as const).map((value) => (
            <label key={value} className="flex min-h-14 min-w-28 items-center gap-3 border px-4">
              <input
                type="radio"
                name="on"
                value={value}
                required
                defaultChecked={typed?.on === value}
                className="size-6"
              />
              {value === 'on' ? 'On' : 'Off'}
            </label>
          ))}
        </div>
        {errors?.on !== undefined && (
          <p id="on-error" className="mt-1 text-sm text-bad">
            {errors.on.join(' ')}
          </p>
        )}
      </fieldset>
      <SiteTimeField
        name="at"
        label="When you found it so"
        at={now}
        typed={typed?.at}
        zone={zone}
        errors={errors?.at}
      />
      <SelectField
        name="supply"
        label="Supply set that you looked at"
        defaultValue={typed?.supply ?? ''}
        options={[
          { value: '', label: 'None, or not a supply set' },
          ...supplies.map((tag) => ({ value: tag, label: tag })),
        ]}
        errors={errors?.supply}
      />
      <TextAreaField
        name="how"
        label="How you know"
        hint="What you read, switched or locked. A control that says “off” is no isolation."
        rows={3}
        required
        defaultValue={typed?.how}
        errors={errors?.how}
      />
      <Button kind="primary" disabled={sending} className="min-h-14">
        Write it down
      </Button>
    </Form>
  )
}
