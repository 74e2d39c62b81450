/** What the site has decided about permits, permits held back from deletion, and the deletion of old ones. */
import { Form, Link, useNavigation } from 'react-router'
import type { PermitPolicy } from '#app/domain/permit-facts.ts'
import { PERMIT_STATE_LABELS } from '#app/domain/permit-words.ts'
import type { PolicyEntry } from '#app/services/permit-policy.server.ts'
import type { RetentionView } from '#app/services/retention.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { ownFailure, SignatureField } from './policy-forms.tsx'
import { RunsPanel } from './retention-runs.tsx'

export interface PolicyPageProps {
  policy: PermitPolicy
  entries: readonly PolicyEntry[]
  retention: RetentionView
  maySet: boolean
  mayAsk: boolean
  mayAgree: boolean
  personId: number
  failure: ActionFailure | undefined
}

export function PolicyPage(props: PolicyPageProps) {
  const { policy, entries, maySet } = props
  return (
    <>
      <PageHead
        title="Permit policy"
        crumbs={
          <Link to="/permits" className="link">
            Permits
          </Link>
        }
      >
        Set by safety officers, signed. The newest setting holds.
      </PageHead>
      <div className="grid items-start gap-x-4.5 lg:grid-cols-2">
        <Panel title="In force">
          {entries.length === 0 && (
            <Notice tone="warn" lead="Not set by site. ">
              What stands here is our proposal, until an officer sets it.
            </Notice>
          )}
          <Facts
            items={[
              {
                name: 'A window may be extended',
                value: policy.extensionAllowed ? 'yes' : 'no, a new permit is made',
              },
              { name: 'Ended permits are kept', value: `${policy.keepDays} days at least` },
            ]}
          />
          {maySet && <PolicyForm {...props} />}
        </Panel>
        <HeldPanel {...props} />
      </div>
      <RunsPanel {...props} />
      <Panel title="Settings so far">
        <DataTable
          caption="Settings, the newest first"
          columns={[
            { key: 'at', head: 'Set', cell: ({ at }) => <Instant at={at} />, nowrap: true, rowHead: true },
            { key: 'by', head: 'By', cell: ({ by }) => by ?? 'the product' },
            {
              key: 'extension',
              head: 'Extension',
              cell: ({ extensionAllowed }) => (extensionAllowed ? 'allowed' : 'not allowed'),
            },
            { key: 'days', head: 'Days kept', cell: ({ keepDays }) => keepDays, align: 'right' },
            { key: 'reason', head: 'Why', cell: ({ reason }) => reason },
          ]}
          rows={entries}
          rowKey={({ id }) => id}
          empty="None yet."
        />
      </Panel>
    </>
  )
}

function PolicyForm({ policy, entries, failure }: PolicyPageProps) {
  const sending = useNavigation().formMethod === 'POST'
  const mine = ownFailure(failure, 'set-policy')
  const { typed, fields: errors } = mine ?? { typed: undefined, fields: {} as ActionFailure['fields'] }
  return (
    <Form method="post" className="mt-4 border-t pt-3 print:hidden">
      <FormFailure failure={mine} />
      <input type="hidden" name="intent" value="set-policy" />
      <input type="hidden" name="seen" value={entries[0]?.id ?? 0} />
      <fieldset className="mb-4">
        <legend className="mb-1 font-medium">May the window of a live permit be extended?</legend>
        {(
          [
            ['yes', 'Yes: by an officer, twice at most, 72 hours in all'],
            ['no', 'No: a new permit is made'],
          ] as const
        ).map(([value, text]) => (
          <label key={value} className="flex min-h-11 items-center gap-2">
            <input
              type="radio"
              name="extensionAllowed"
              value={value}
              required
              defaultChecked={typed?.extensionAllowed === value}
              className="size-5"
            />
            {text}
          </label>
        ))}
        {errors.extensionAllowed !== undefined && (
          <p className="text-sm text-bad">{errors.extensionAllowed.join(' ')}</p>
        )}
      </fieldset>
      <TextField
        name="keepDays"
        label="Days for which an ended permit is kept"
        inputMode="numeric"
        autoComplete="off"
        required
        defaultValue={typed?.keepDays ?? String(policy.keepDays)}
        errors={errors.keepDays}
      />
      <TextField
        name="reason"
        label="Why"
        autoComplete="off"
        required
        defaultValue={typed?.reason}
        errors={errors.reason}
      />
      <SignatureField errors={errors.password} />
      <Button kind="primary" disabled={sending}>
        Sign: set it
      </Button>
    </Form>
  )
}

function HeldPanel({ retention, maySet, failure }: PolicyPageProps) {
  const sending = useNavigation().formMethod === 'POST'
  const mine = ownFailure(failure, 'hold', 'release')
  const { typed, fields: errors } = mine ?? { typed: undefined, fields: {} as ActionFailure['fields'] }
  return (
    <Panel title="Held back from deletion">
      <p className="mb-2 text-ink-2">
        A permit under which something dangerous was noted is held by itself, until an officer releases it.
      </p>
      <DataTable
        caption="Permits that no run deletes"
        columns={[
          {
            key: 'number',
            head: 'Permit',
            rowHead: true,
            nowrap: true,
            cell: ({ number }) => (
              <Link to={`/permits/${number}`} className="link">
                {number}
              </Link>
            ),
          },
          { key: 'state', head: 'State', cell: ({ state }) => PERMIT_STATE_LABELS[state] },
          { key: 'reason', head: 'Why held', cell: ({ reason }) => reason },
        ]}
        rows={retention.held}
        rowKey={({ number }) => number}
        empty="None."
      />
      {maySet && (
        <Form method="post" className="mt-4 border-t pt-3 print:hidden">
          <FormFailure failure={mine} />
          <TextField
            name="number"
            label="Permit"
            autoComplete="off"
            required
            defaultValue={typed?.number}
            errors={errors.number}
          />
          <TextField
            name="reason"
            label="Why"
            autoComplete="off"
            required
            defaultValue={typed?.reason}
            errors={errors.reason}
          />
          <SignatureField errors={errors.password} />
          <div className="flex flex-wrap gap-2">
            <Button name="intent" value="hold" disabled={sending}>
              Sign: hold it
            </Button>
            <Button name="intent" value="release" kind="danger" disabled={sending}>
              Sign: release it
            </Button>
          </div>
        </Form>
      )}
    </Panel>
  )
}
