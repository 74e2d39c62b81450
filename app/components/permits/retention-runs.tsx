/** The deletion of old permits: what is old enough, the run that waits, and those that are over. */
import { Form, useNavigation } from 'react-router'
import type { RetentionRun, RetentionView } from '#app/services/retention.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { ownFailure, SignatureField } from './policy-forms.tsx'

interface RunsProps {
  retention: RetentionView
  mayAsk: boolean
  mayAgree: boolean
  /** The reader, who does not agree to what they asked for. */
  personId: number
  failure: ActionFailure | undefined
}

export function RunsPanel(props: RunsProps) {
  const { retention, mayAsk } = props
  const waiting = retention.runs.find(
    ({ agreedAt, calledOffAt }) => agreedAt === null && calledOffAt === null,
  )
  const over = retention.runs.filter((run) => run !== waiting)
  return (
    <Panel title="Deleting old permits">
      <p className="mb-3 text-ink-2">
        An administrator asks, a safety officer or engineer who is somebody else agrees. A permit goes with
        its versions, acts, locks, tests, rounds, rulings and photos; the manifest, the record and the
        signatures stay. Readings and log entries are never deleted.
      </p>
      {waiting === undefined ? (
        <>
          <p className="mb-2">
            {retention.deletable.length === 0 ? (
              'No ended permit is old enough and free to go.'
            ) : (
              <>
                {retention.deletable.length} ended before <Instant at={retention.before} /> and are free to
                go: {retention.deletable.join(', ')}.
              </>
            )}
          </p>
          {mayAsk && retention.deletable.length > 0 && <AskForm {...props} />}
        </>
      ) : (
        <WaitingRun run={waiting} {...props} />
      )}
      <div className="mt-3">
        <DataTable
          caption="Runs that are over, the newest first"
          columns={[
            { key: 'id', head: 'Run', cell: ({ id }) => id, rowHead: true },
            {
              key: 'asked',
              head: 'Asked for',
              cell: ({ askedAt, askedByName }) => (
                <>
                  <Instant at={askedAt} /> by {askedByName}
                </>
              ),
            },
            { key: 'end', head: 'What became of it', cell: (run) => <RunEnd run={run} /> },
            { key: 'manifest', head: 'Manifest', cell: ({ id }) => <ManifestLink id={id} /> },
          ]}
          rows={over}
          rowKey={({ id }) => id}
          empty="No run is over."
        />
      </div>
    </Panel>
  )
}

function RunEnd({ run }: { run: RetentionRun }) {
  if (run.calledOffAt !== null) {
    return (
      <>
        Called off <Instant at={run.calledOffAt} />
      </>
    )
  }
  const { permits } = run.manifest
  const deleted = permits.filter(({ deletedAt }) => deletedAt !== null).length
  return (
    <>
      {deleted} of {permits.length} deleted, agreed to by {run.agreedByName}
      {run.doneAt === null ? '; broken off, goes on within a minute' : ''}
    </>
  )
}

function ManifestLink({ id }: { id: number }) {
  return (
    <a href={`/permits/policy/runs/${id}/manifest.json`} className="link py-1" download>
      Download
    </a>
  )
}

function AskForm({ failure }: RunsProps) {
  const sending = useNavigation().formMethod === 'POST'
  const mine = ownFailure(failure, 'ask-run')
  return (
    <Form method="post" className="max-w-[46rem] print:hidden">
      <FormFailure failure={mine} />
      <input type="hidden" name="intent" value="ask-run" />
      <SignatureField errors={mine?.fields.password} />
      <Button kind="danger" disabled={sending}>
        Sign: ask for these to be deleted
      </Button>
    </Form>
  )
}

function WaitingRun({ run, mayAsk, mayAgree, personId, failure }: RunsProps & { run: RetentionRun }) {
  const sending = useNavigation().formMethod === 'POST'
  const mine = ownFailure(failure, 'agree', 'call-off')
  const own = run.askedBy === personId
  const hidden = (
    <>
      <input type="hidden" name="runId" value={run.id} />
      <input type="hidden" name="revision" value={run.revision} />
    </>
  )
  return (
    <>
      <p className="mb-2">
        <strong>Run {run.id} waits for agreement.</strong> {run.askedByName} asked for it{' '}
        <Instant at={run.askedAt} age />.
      </p>
      <DataTable
        caption="What it would delete"
        columns={[
          { key: 'number', head: 'Permit', cell: ({ number }) => number, rowHead: true, nowrap: true },
          { key: 'segments', head: 'Segments', cell: ({ segments }) => segments.join(', ') },
          {
            key: 'ended',
            head: 'Ended',
            nowrap: true,
            cell: ({ endedAt }) => (endedAt === null ? null : <Instant at={new Date(endedAt)} />),
          },
          {
            key: 'rows',
            head: 'Goes with it',
            cell: ({ counts }) =>
              Object.entries(counts)
                .filter(([, count]) => count > 0)
                .map(([name, count]) => `${count} ${name === 'boxLocks' ? 'box locks' : name}`)
                .join(', '),
          },
        ]}
        rows={run.manifest.permits}
        rowKey={({ number }) => number}
        empty="Nothing."
      />
      <div className="my-3 flex flex-wrap gap-2 print:hidden">
        <ButtonLink to={`/permits/policy/runs/${run.id}/manifest.json`} reloadDocument download="">
          Manifest
        </ButtonLink>
        <ButtonLink
          to={`/permits/policy/runs/${run.id}/manifest.json?with=content`}
          reloadDocument
          download=""
        >
          Everything it would delete, to keep elsewhere
        </ButtonLink>
      </div>
      <FormFailure failure={mine} />
      {mayAgree && own && <p className="mb-2">You asked for it; somebody else agrees.</p>}
      {mayAgree && !own && (
        <Form method="post" className="mb-3 max-w-[46rem] print:hidden">
          <input type="hidden" name="intent" value="agree" />
          {hidden}
          <SignatureField errors={mine?.fields.password} />
          <Button kind="danger" disabled={sending}>
            Sign: delete them
          </Button>
        </Form>
      )}
      {(mayAgree || mayAsk) && (
        <Form method="post" className="print:hidden">
          <input type="hidden" name="intent" value="call-off" />
          {hidden}
          <Button disabled={sending}>Call it off</Button>
        </Form>
      )}
    </>
  )
}
