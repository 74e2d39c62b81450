/** Tests of a permit on a tablet: how each stands, and a form for it that asks for no more than it needs. */
import { Form, useNavigation } from 'react-router'
import { figureText, limitsOf, needsInstrument, TEST_UNITS } from '#app/domain/permit-tests.ts'
import { PERMIT_TEST_KINDS, PERMIT_TEST_LABELS, type PermitTestKind } from '#app/domain/permit-words.ts'
import { testKey } from '#app/domain/schemas/permit-site.ts'
import type { SiteTestsData } from '#app/services/permit-site.server.ts'
import type { TestLine } from '#app/services/permit-tests.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { ChoiceField, DoneByField } from './site-fields.tsx'
import { SiteFrame, SiteStep, SiteSubmit } from './site-frame.tsx'
import { TestMark } from './tests-table.tsx'

export interface SiteTestsProps {
  page: SiteTestsData
  failure: ActionFailure | undefined
}

/** A test beyond those that the permit asks for is told by this word in its form. */
const EXTRA = 'extra'

export function SiteTests({ page, failure }: SiteTestsProps) {
  return (
    <SiteFrame head={page} here="/tests" title="Tests">
      {page.lines.map((line) => (
        <Panel
          key={testKey(line)}
          title={PERMIT_TEST_LABELS[line.kind]}
          aside={<TestMark state={line.state} />}
        >
          <LineStory line={line} />
          {page.may.test && (
            <TestForm kind={line.kind} line={line} page={page} failure={failure} form={testKey(line)} />
          )}
        </Panel>
      ))}
      {page.may.test && (
        <Panel title="Another test">
          <TestForm kind={null} line={null} page={page} failure={failure} form={EXTRA} />
        </Panel>
      )}
      <Panel title="All results">
        {page.taken.length === 0 && <p className="text-ink-2">None yet.</p>}
        <ul>
          {page.taken.map((test) => (
            <li key={test.id} className="border-b border-rule-2 py-2">
              <p>
                <strong className="font-semibold">{PERMIT_TEST_LABELS[test.kind]}</strong>
                {test.place !== '' && `, ${test.place}`}:{' '}
                {test.value === null ? '' : `${figureText(test.value, test.unit)}, `}
                {test.passed ? 'passed' : 'not passed'}
              </p>
              <p className="text-sm text-ink-2">
                <Instant at={test.takenAt} /> by {test.testerName}
                {test.witnessName !== null && ` (entered by ${test.witnessName})`}
                {test.instrumentSerial !== '' && `, with ${test.instrumentSerial}`}
              </p>
              {test.note !== '' && <p className="text-sm">{test.note}</p>}
            </li>
          ))}
        </ul>
      </Panel>
    </SiteFrame>
  )
}

function LineStory({ line }: { line: TestLine }) {
  return (
    <>
      <p className="text-lg">
        {line.place}
        {line.limits !== '' && `${line.place === '' ? '' : ': '}${line.limits}`}
      </p>
      <p className="text-ink-2">
        {line.everyHours === null ? 'Once before acceptance' : `Every ${line.everyHours} h`}
        {line.nextDueAt !== null && (
          <>
            , due <Instant at={line.nextDueAt} age />
          </>
        )}
      </p>
      <p className="mb-3">{line.text}</p>
    </>
  )
}

function TestForm({
  kind,
  line,
  page,
  failure,
  form,
}: {
  kind: PermitTestKind | null
  line: TestLine | null
  form: string
} & SiteTestsProps) {
  const mine = failure?.typed?.form === form ? failure : undefined
  const sending = useNavigation().formMethod === 'POST'
  const { typed, fields } = mine ?? {}
  // Of a test of any kind it is not known beforehand what it needs; of one asked for it is.
  const limits = kind === null ? null : limitsOf(kind, line?.required ?? null)
  const figure = kind === null || limits !== null || needsInstrument(kind)
  const unit = limits?.unit ?? line?.unit ?? ''
  return (
    <SiteStep
      label={line?.last == null ? 'Write a test down' : 'Write another one down'}
      open={mine !== undefined}
    >
      <Form method="post" key={page.taken[0]?.id ?? 0}>
        <FormFailure failure={mine} />
        <input type="hidden" name="form" value={form} />
        {kind === null ? (
          <>
            <SelectField
              name="kind"
              label="What was tested"
              required
              defaultValue={typed?.kind ?? ''}
              options={[
                { value: '', label: 'Choose' },
                ...PERMIT_TEST_KINDS.map((each) => ({
                  value: each,
                  label: `${PERMIT_TEST_LABELS[each]}${TEST_UNITS[each] === '' ? '' : ` (${TEST_UNITS[each]})`}`,
                })),
              ]}
              errors={fields?.kind}
            />
            <TextField
              name="place"
              label="Where"
              maxLength={200}
              defaultValue={typed?.place}
              errors={fields?.place}
            />
          </>
        ) : (
          <>
            <input type="hidden" name="kind" value={kind} />
            <input type="hidden" name="place" value={line?.place ?? ''} />
          </>
        )}
        {figure && (
          <TextField
            name="value"
            label={unit === '' ? 'Figure' : `Figure, in ${unit}`}
            hint={limits === null ? 'As the instrument shows it.' : `Wanted: ${line?.limits}.`}
            inputMode="decimal"
            autoComplete="off"
            required={kind !== null}
            defaultValue={typed?.value}
            errors={fields?.value}
          />
        )}
        {(kind === 'oxygen' || kind === null) && page.segments.length > 1 && (
          <SelectField
            name="segment"
            label="At which segment (oxygen)"
            required={kind === 'oxygen'}
            defaultValue={typed?.segment ?? ''}
            options={[
              { value: '', label: 'Choose' },
              ...page.segments.map((tag) => ({ value: tag, label: tag })),
            ]}
            errors={fields?.segment}
          />
        )}
        {limits === null && (
          <ChoiceField
            name="says"
            label="Did it pass?"
            options={[
              { value: 'passed', label: 'Passed' },
              { value: 'failed', label: 'Failed' },
            ]}
            chosen={typed?.says}
            errors={fields?.says}
            required={kind !== null}
          />
        )}
        {(kind === null || needsInstrument(kind)) && (
          <>
            <TextField
              name="instrument"
              label="Serial number of the instrument"
              autoComplete="off"
              maxLength={40}
              defaultValue={typed?.instrument}
              errors={fields?.instrument}
            />
            <TextField
              name="calibrationDue"
              label="Calibrated up to and including"
              hint="From its label, such as 2027-03-31. Only where the register does not know it."
              autoComplete="off"
              defaultValue={typed?.calibrationDue}
              errors={fields?.calibrationDue}
            />
          </>
        )}
        <SiteTimeField
          name="takenAt"
          label="Taken at"
          at={page.now}
          typed={typed?.takenAt}
          zone={page.zone}
          errors={fields?.takenAt}
        />
        <DoneByField
          label="Tested by"
          self={page.actor.name}
          witnessed={page.witnessed}
          typed={typed}
          errors={fields?.by}
        />
        <TextField
          name="note"
          label="Note, if any"
          maxLength={500}
          defaultValue={typed?.note}
          errors={fields?.note}
        />
        <SiteSubmit sending={sending}>Write it down</SiteSubmit>
      </Form>
    </SiteStep>
  )
}
