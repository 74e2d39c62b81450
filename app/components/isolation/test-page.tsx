/** One recorded isolation test: what it found, and the engineer's word on it. */
import { Form, Link, useNavigation } from 'react-router'
import { againstLimit } from '#app/domain/isolation-tests.ts'
import type { IsolationTestDetail } from '#app/services/isolation-tests.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { CheckField, TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { FindingFacts } from './finding-facts.tsx'
import { RiseChart } from './rise-chart.tsx'
import { TestState } from './test-state.tsx'

export interface TestPageProps extends IsolationTestDetail {
  mayDecide: boolean
  failure: ActionFailure | undefined
}

export function TestPage({ test, curve, openedSince, mayDecide, failure }: TestPageProps) {
  const tag = test.segmentTag
  return (
    <>
      <PageHead
        title={`Isolation test ${test.id} of ${tag}`}
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
        <TestState state={test.state} /> · valve closed <Instant at={test.closedAt} age />
      </PageHead>
      {test.state === 'voided' && (
        <Notice tone="warn" lead="Voided. ">
          {test.voidRemark} ({test.voidedByName}, {test.voidedAt !== null && <Instant at={test.voidedAt} />})
        </Notice>
      )}
      {test.state === 'accepted' && openedSince !== null && (
        <Notice tone="warn" lead="Counts no more. ">
          {tag} was opened after this test (until <Instant at={openedSince} />
          ); what was tested then is not what is closed now.
        </Notice>
      )}
      <div className="grid items-start gap-x-4.5 lg:grid-cols-[minmax(0,1fr)_22rem]">
        <div className="min-w-0">
          <Panel title="The rise">
            <RiseChart
              caption={`Pressure at ${test.positionTag} in ${tag} against hours since its valve was closed`}
              points={curve.points}
              window={test}
              finding={test.finding}
              opening={curve.opening}
              limitPaPerHour={test.limitPaPerHour}
            />
          </Panel>
          <Panel title="Result">
            <FindingFacts finding={test.finding} limitPaPerHour={test.limitPaPerHour} />
          </Panel>
        </div>
        <div className="min-w-0">
          <Panel title="On record">
            <Facts
              items={[
                { name: 'Fitted from', value: <Instant at={test.fitFrom} /> },
                { name: 'to', value: <Instant at={test.fitTo} /> },
                {
                  name: 'Recorded by',
                  value: (
                    <>
                      {test.recordedByName}, <Instant at={test.recordedAt} />
                    </>
                  ),
                },
                ...(test.acceptedAt === null
                  ? []
                  : [
                      {
                        name: 'Accepted and signed by',
                        value: (
                          <>
                            {test.acceptedByName}, <Instant at={test.acceptedAt} />
                          </>
                        ),
                      },
                    ]),
              ]}
            />
            {test.note !== '' && <p className="mt-2">{test.note}</p>}
            {test.acceptRemark !== '' && <p className="mt-2">Accepted because: {test.acceptRemark}</p>}
            {test.state === 'accepted' && openedSince === null && (
              <p className="mt-2 print:hidden">
                <Link to={`/bakes/options?segments=${tag}`} className="link">
                  Options for a bake of {tag}
                </Link>
              </p>
            )}
          </Panel>
          {mayDecide && test.state !== 'voided' && (
            <DecisionPanels key={test.revision} test={test} failure={failure} />
          )}
        </div>
      </div>
    </>
  )
}

function DecisionPanels({
  test,
  failure,
}: {
  test: TestPageProps['test']
  failure: ActionFailure | undefined
}) {
  const of = (intent: string) => (failure?.typed?.intent === intent ? failure : undefined)
  // A refusal that belongs to neither form still has to be said.
  const stray =
    failure !== undefined && of('accept') === undefined && of('void') === undefined ? failure : undefined
  return (
    <>
      <FormFailure failure={stray} />
      {test.state === 'recorded' && (
        <Panel title="Accept" className="print:hidden">
          <DecisionForm
            intent="accept"
            test={test}
            failure={of('accept')}
            label="Why it is good enough"
            hint="What the curve shows and what it was checked against."
            button="Accept and sign"
          />
        </Panel>
      )}
      <Panel title="Void" className="print:hidden">
        <DecisionForm
          intent="void"
          test={test}
          failure={of('void')}
          label="Why it says nothing"
          hint="It stays on record as voided, and cannot come back."
          button="Void and sign"
        />
      </Panel>
    </>
  )
}

function DecisionForm({
  intent,
  test,
  failure,
  label,
  hint,
  button,
}: {
  intent: 'accept' | 'void'
  test: TestPageProps['test']
  failure: ActionFailure | undefined
  label: string
  hint: string
  button: string
}) {
  const sending = useNavigation().formMethod === 'POST'
  const doubtful = againstLimit(test.finding, test.limitPaPerHour) !== 'within'
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value={intent} />
      <input type="hidden" name="revision" value={test.revision} />
      <TextAreaField
        name="remark"
        label={label}
        hint={hint}
        rows={3}
        required
        minLength={10}
        maxLength={1000}
        defaultValue={failure?.typed?.remark}
        errors={failure?.fields.remark}
      />
      {intent === 'accept' && doubtful && (
        <CheckField
          name="knowingly"
          label="I accept it although the rise is not clearly within the limit"
          defaultChecked={failure?.typed?.knowingly === 'on'}
          errors={failure?.fields.knowingly}
        />
      )}
      <TextField
        name="password"
        label="Your password, as your signature"
        type="password"
        autoComplete="current-password"
        required
        errors={failure?.fields.password}
      />
      <Button kind={intent === 'void' ? 'danger' : 'primary'} disabled={sending}>
        {sending ? 'Signing' : button}
      </Button>
    </Form>
  )
}
