/** The form that edits one thing of the register, or adds one: its facts, since when they hold, and why. */
import { useMemo } from 'react'
import { Form, Link, useNavigation } from 'react-router'
import { type EditedKind, editedSchema, KIND_FACTS } from '#app/domain/schemas/register.ts'
import type { FieldValue } from '#app/domain/schemas/register-values.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { ActionFailure, Typed } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { RegisterField } from './register-fields.tsx'
import { useCheckedForm } from './use-checked-form.ts'

/**
 * What an action of the register answers when it refused. After a conflict it holds nothing that was typed: there the
 * present values have to be looked at first.
 */
export interface RegisterFailure extends ActionFailure {
  /** The form that was sent. */
  intent: string
}

/**
 * @param values recorded values; absent for a new thing
 * @param revision revision the form is made for
 */
export function ThingForm({
  kind,
  values,
  revision,
  segments,
  failure: answered,
}: {
  kind: EditedKind
  values?: Readonly<Record<string, FieldValue>>
  revision: number
  segments: readonly string[]
  failure: RegisterFailure | undefined
}) {
  const { zone, now } = useSite()
  const isNew = values === undefined
  const facts = KIND_FACTS[kind]
  const schema = useMemo(() => editedSchema(kind, zone, isNew), [kind, zone, isNew])
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useNavigation().formMethod === 'POST'
  const typed = answered?.typed
  return (
    <Form method="post" noValidate onSubmit={onSubmit}>
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value={isNew ? 'add' : 'edit'} />
      <input type="hidden" name="revision" value={typed?.revision ?? revision} />
      <div className="grid gap-x-4 sm:grid-cols-2">
        {isNew && facts.tag !== null && (
          <TextField
            name="tag"
            label={facts.tag.label}
            hint={`Such as ${facts.tag.example}. It cannot be changed later.`}
            maxLength={facts.tag.max}
            defaultValue={typed?.tag ?? ''}
            errors={errorsOf('tag')}
          />
        )}
        {facts.fields.map((field) => (
          <RegisterField
            key={field.name}
            field={field}
            value={values?.[field.name] ?? null}
            typed={typed}
            zone={zone}
            segments={segments}
            errors={errorsOf(field.name)}
          />
        ))}
      </div>
      <SiteTimeField
        name="validFrom"
        label="Holds since"
        at={now}
        typed={typed?.validFrom}
        zone={zone}
        hint="Since when it is so: now or earlier."
        errors={errorsOf('validFrom')}
      />
      <ReasonField typed={typed} errors={errorsOf('reason')} />
      <Conflict failure={answered} />
      <Button kind="primary" disabled={sending}>
        {sending ? 'Saving' : isNew ? `Add the ${facts.one}` : 'Save the change'}
      </Button>
    </Form>
  )
}

/** Why something is changed. */
export function ReasonField({
  typed,
  errors,
}: {
  typed: Typed | undefined
  errors: readonly string[] | undefined
}) {
  return (
    <TextAreaField
      name="reason"
      label="Reason"
      hint="It stands on the record beside the change."
      rows={2}
      maxLength={500}
      defaultValue={typed?.reason ?? ''}
      errors={errors}
    />
  )
}

/** After a conflict the page in front of the reader is old; this fetches it anew. */
export function Conflict({ failure }: { failure: RegisterFailure | undefined }) {
  if (failure === undefined || failure.typed !== undefined) return null
  return (
    <p className="mb-4">
      <Link to="." reloadDocument className="link">
        Show the present values
      </Link>
    </p>
  )
}
