/** Lists of the permit form: rows are added and taken out by buttons that work with and without script. */
import { useRef } from 'react'
import { useFieldArray, useFormContext } from 'react-hook-form'
import { blankRow, type PermitFormValues } from '#app/domain/permit-form-values.ts'
import { PERMIT_TEST_KINDS, PERMIT_TEST_LABELS } from '#app/domain/permit-words.ts'
import { MOST_ROWS, RELATED_KINDS, type RowKind } from '#app/domain/schemas/permit-form.ts'
import { Button } from '../ui/button.tsx'
import { Choice, Figure, fieldAddress, Line, useFieldErrors } from './permit-fields.tsx'

const RELATED_LABELS: Record<(typeof RELATED_KINDS)[number], string> = {
  electrical: 'Electrical permit',
  'confined-space': 'Confined-space permit',
  'hot-work': 'Hot-work permit',
  lifting: 'Lifting plan',
  'isolation-record': 'Isolation record',
  other: 'Other paper',
}

const PURPOSE_OPTIONS = [
  { value: 'to-heat', label: 'So that it can be heated' },
  { value: 'to-work', label: 'So that somebody can work there' },
]

const BOX_OPTIONS = [
  { value: 'no', label: 'No' },
  { value: 'yes', label: 'Yes' },
]

const TEST_OPTIONS = [
  { value: '', label: 'Choose' },
  ...PERMIT_TEST_KINDS.map((kind) => ({ value: kind, label: PERMIT_TEST_LABELS[kind] })),
]

/**
 * A list of rows with its buttons. The one who adds a row goes on in it; the one who takes a row out goes on at the
 * button that adds one, so that the keyboard's place is never lost.
 */
function Rows({
  kind,
  one,
  none,
  children,
}: {
  kind: RowKind
  /** What a row is, such as "test". */
  one: string
  /** Said where there are no rows. */
  none: string
  children: (index: number) => React.ReactNode
}) {
  const { control, getValues, setFocus } = useFormContext<PermitFormValues>()
  const { fields, append, remove } = useFieldArray({ control, name: kind })
  const adds = useRef<HTMLButtonElement>(null)
  const errors = useFieldErrors(kind)
  return (
    <div id={fieldAddress(kind)} tabIndex={-1}>
      {errors.map((error) => (
        <p key={error} className="mb-2 text-sm text-bad">
          {error}
        </p>
      ))}
      {fields.length === 0 && <p className="mb-3 text-ink-2">{none}</p>}
      <ol>
        {fields.map((field, index) => (
          <li key={field.id} className="mb-3 border-t pt-3 first:border-t-0 first:pt-0">
            <fieldset className="min-w-0">
              <legend className="sr-only">
                {one} {index + 1}
              </legend>
              {children(index)}
              <Button
                name="intent"
                value={`remove:${kind}:${index}`}
                formNoValidate
                aria-label={`Take out ${one} ${index + 1}`}
                onClick={(event) => {
                  event.preventDefault()
                  remove(index)
                  adds.current?.focus()
                }}
              >
                Take out
              </Button>
            </fieldset>
          </li>
        ))}
      </ol>
      <button
        ref={adds}
        type="submit"
        name="intent"
        value={`add:${kind}`}
        formNoValidate
        disabled={fields.length >= MOST_ROWS[kind]}
        className="inline-flex min-h-10 items-center rounded-md border border-ink bg-sheet px-3.5 py-1.5 font-medium hover:bg-rule-2 disabled:border-rule disabled:bg-rule-2 disabled:text-ink-2 pointer-coarse:min-h-11"
        onClick={(event) => {
          event.preventDefault()
          append(blankRow(kind, getValues()), { shouldFocus: false })
          const [first] = Object.keys(blankRow(kind, getValues()))
          // After the row has been drawn.
          setTimeout(() => setFocus(`${kind}.${fields.length}.${first}` as 'points.0.tag'), 0)
        }}
      >
        Add a {one}
      </button>
    </div>
  )
}

export function RelatedRows() {
  return (
    <Rows kind="related" one="paper" none="No other paper goes with this permit so far.">
      {(index) => (
        <div className="grid gap-x-4 sm:grid-cols-2">
          <Choice
            name={`related.${index}.kind`}
            label="Paper"
            options={RELATED_KINDS.map((kind) => ({ value: kind, label: RELATED_LABELS[kind] }))}
          />
          <Line name={`related.${index}.number`} label="Its number" />
        </div>
      )}
    </Rows>
  )
}

export function PointRows() {
  return (
    <Rows kind="points" one="point" none="No point is listed so far.">
      {(index) => (
        <div className="grid gap-x-4 sm:grid-cols-[8rem_1fr_1fr]">
          <Line name={`points.${index}.tag`} label="Point" most={20} />
          <Line name={`points.${index}.isolates`} label="What is isolated" />
          <Line name={`points.${index}.required`} label="Required position" />
          <div className="sm:col-start-2">
            <Choice name={`points.${index}.purpose`} label="Why" options={PURPOSE_OPTIONS} />
          </div>
          <Choice name={`points.${index}.boxed`} label="Key goes to the lock box" options={BOX_OPTIONS} />
        </div>
      )}
    </Rows>
  )
}

export function TestRows() {
  return (
    <Rows kind="tests" one="test" none="No test is listed so far.">
      {(index) => (
        <>
          <div className="grid gap-x-4 sm:grid-cols-2">
            <Choice name={`tests.${index}.kind`} label="Test" options={TEST_OPTIONS} />
            <Line name={`tests.${index}.place`} label="Where" />
          </div>
          <div className="grid grid-cols-2 gap-x-4 lg:grid-cols-4">
            <Figure name={`tests.${index}.low`} label="At least" />
            <Figure name={`tests.${index}.high`} label="At most" />
            <Line name={`tests.${index}.unit`} label="Unit" most={16} />
            <Figure name={`tests.${index}.everyHours`} label="Again every, h" hint="Empty: once." />
          </div>
        </>
      )}
    </Rows>
  )
}

export function ContactRows() {
  return (
    <Rows kind="contacts" one="contact" none="No telephone number so far.">
      {(index) => (
        <div className="grid gap-x-4 sm:grid-cols-3">
          <Line name={`contacts.${index}.role`} label="Who answers" />
          <Line name={`contacts.${index}.name`} label="Name" />
          <Line name={`contacts.${index}.phone`} label="Telephone" />
        </div>
      )}
    </Rows>
  )
}
