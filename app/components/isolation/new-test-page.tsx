/** A new isolation test: choose the window, see the fit, record it. The fit is tried by reading, without saving anything. */
import { Form, Link, useNavigation } from 'react-router'
import { SHAPE_WORDS } from '#app/domain/isolation-tests.ts'
import type { IsolationDraft } from '#app/services/isolation-tests.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { SelectField, TextAreaField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { typedTime } from '../ui/site-time.ts'
import { FindingFacts } from './finding-facts.tsx'
import { RiseChart } from './rise-chart.tsx'

export interface NewTestPageProps {
  draft: IsolationDraft
  /** What was typed into the address, readable or not. */
  asked: { typed: Readonly<Record<string, string>>; fields: Readonly<Record<string, string[]>> }
  zone: string
  failure: ActionFailure | undefined
}

export function NewTestPage({ draft, asked, zone, failure }: NewTestPageProps) {
  const { tag, answer, window, curve } = draft
  const finding = answer?.kind === 'fitted' ? answer.finding : null
  const opening = answer?.kind === 'refused' ? (answer.opening ?? curve.opening) : curve.opening
  return (
    <>
      <PageHead
        title={`Isolation test of ${tag}`}
        crumbs={
          <>
            <Link to="/" className="link">
              Line
            </Link>
            {' / '}
            <Link to={`/segments/${tag}`} className="link">
              {tag}
            </Link>
          </>
        }
      >
        How fast the pressure rises while the pump valve is shut. Try windows as often as you like; only
        "Record" saves one.
      </PageHead>
      {!draft.stateSaysIsolated && (
        <Notice tone="warn" lead="No isolation on record. ">
          No state of {tag} says that it was isolated. Give the time at which the valve was closed, and see
          that it stays so in the log.
        </Notice>
      )}
      <div className="grid items-start gap-x-4.5 lg:grid-cols-[minmax(0,1fr)_22rem]">
        <div className="min-w-0">
          <Panel title="The rise">
            {answer?.kind === 'refused' && <Refusal answer={answer} draft={draft} zone={zone} />}
            <RiseChart
              caption={chartCaption(draft)}
              points={curve.points}
              window={window}
              finding={finding}
              opening={opening}
              limitPaPerHour={draft.limitPaPerHour}
            />
          </Panel>
          {finding !== null && (
            <Panel title="What the fit says">
              <FindingFacts finding={finding} limitPaPerHour={draft.limitPaPerHour} />
            </Panel>
          )}
        </div>
        <Panel title="Window" className="print:hidden">
          <WindowForm
            key={typedTime(window.fitTo, zone)}
            draft={draft}
            asked={asked}
            zone={zone}
            failure={failure}
          />
        </Panel>
      </div>
    </>
  )
}

function chartCaption({ tag, window, answer }: IsolationDraft): string {
  const shape = answer?.kind === 'fitted' ? `. ${SHAPE_WORDS[answer.finding.kind]}` : ''
  return `Pressure at ${window.gauge} in ${tag} against hours since its valve was closed${shape}`
}

function Refusal({
  answer,
  draft,
  zone,
}: {
  answer: Extract<NonNullable<IsolationDraft['answer']>, { kind: 'refused' }>
  draft: IsolationDraft
  zone: string
}) {
  const { offer, opening } = answer
  const search =
    offer === null
      ? ''
      : new URLSearchParams({
          gauge: draft.window.gauge,
          closedAt: typedTime(draft.window.closedAt, zone),
          fitFrom: typedTime(offer.from, zone),
          fitTo: typedTime(offer.to, zone),
        }).toString()
  return (
    <Notice tone="bad" lead="Not fitted. ">
      {answer.message}
      {opening !== null && (
        <>
          {' '}
          It ended <Instant at={opening.at} />: {opening.what}.
        </>
      )}
      {offer !== null && (
        <>
          {' '}
          The longest window before that:{' '}
          <Link to={`/segments/${draft.tag}/isolation-tests/new?${search}`} className="link">
            <Instant at={offer.from} /> to <Instant at={offer.to} />
          </Link>
          .
        </>
      )}
    </Notice>
  )
}

function WindowForm({ draft, asked, zone, failure }: NewTestPageProps) {
  const sending = useNavigation().formMethod === 'POST'
  const typed = failure?.typed ?? asked.typed
  const fields = failure?.fields ?? asked.fields
  const { window } = draft
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <SelectField
        name="gauge"
        label="Gauge"
        defaultValue={typed.gauge ?? window.gauge}
        options={draft.gauges.map(({ tag, label }) => ({
          value: tag,
          label: label === '' ? tag : `${tag}, ${label}`,
        }))}
        errors={fields.gauge}
      />
      <SiteTimeField
        name="closedAt"
        label="Valve closed at"
        at={window.closedAt}
        typed={typed.closedAt}
        zone={zone}
        errors={fields.closedAt}
      />
      <SiteTimeField
        name="fitFrom"
        label="Fit from"
        at={window.fitFrom}
        typed={typed.fitFrom}
        zone={zone}
        errors={fields.fitFrom}
      />
      <SiteTimeField
        name="fitTo"
        label="Fit to"
        at={window.fitTo}
        typed={typed.fitTo}
        zone={zone}
        errors={fields.fitTo}
      />
      <TextAreaField
        name="note"
        label="Note"
        hint="Valves seen shut, how the temperature was, what was odd."
        rows={3}
        maxLength={1000}
        defaultValue={typed.note ?? ''}
        errors={fields.note}
      />
      <div className="flex flex-wrap gap-2">
        <Button kind="primary" disabled={sending || draft.gauges.length === 0}>
          {sending ? 'Recording' : 'Record'}
        </Button>
        <Button formMethod="get">Try this window</Button>
        <ButtonLink to={`/segments/${draft.tag}`}>Back to {draft.tag}</ButtonLink>
      </div>
    </Form>
  )
}
