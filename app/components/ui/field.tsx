/** Form fields: a label, the control, a hint and what is wrong with it, tied together for every kind of reader. */
import type { InputHTMLAttributes, SelectHTMLAttributes, TextareaHTMLAttributes } from 'react'
import { useId } from 'react'

interface FieldProps {
  name: string
  /** An address of its own, for links that lead to it. */
  id?: string | undefined
  label: React.ReactNode
  /** What to put in, where the label cannot say it all. */
  hint?: React.ReactNode
  /** What is wrong with what was put in. */
  errors?: readonly string[] | undefined
}

interface Wiring {
  id: string
  name: string
  'aria-describedby': string | undefined
  'aria-invalid': true | undefined
}

const CONTROL =
  'block w-full min-h-10 rounded-md border border-edge bg-sheet px-2.5 py-1.5 text-ink pointer-coarse:min-h-11 aria-invalid:border-2 aria-invalid:border-bad disabled:bg-rule-2'

/** The frame of a field; the control inside takes the wiring. The other fields here are made of it. */
function Field({
  name,
  id: given,
  label,
  hint,
  errors = [],
  children,
}: FieldProps & { children: (wiring: Wiring) => React.ReactNode }) {
  const own = useId()
  const id = given ?? own
  const hintId = `${id}-hint`
  const errorId = `${id}-error`
  const described = [...(hint === undefined ? [] : [hintId]), ...(errors.length === 0 ? [] : [errorId])].join(
    ' ',
  )
  return (
    <div className="mb-4">
      <label htmlFor={id} className="mb-1 block font-medium">
        {label}
      </label>
      {children({
        id,
        name,
        'aria-describedby': described || undefined,
        'aria-invalid': errors.length > 0 || undefined,
      })}
      {hint !== undefined && (
        <p id={hintId} className="mt-1 text-sm text-ink-2">
          {hint}
        </p>
      )}
      <FieldErrors id={errorId} errors={errors} />
    </div>
  )
}

function FieldErrors({ id, errors }: { id: string; errors: readonly string[] }) {
  if (errors.length === 0) return null
  return (
    <div id={id} className="mt-1 text-sm text-bad">
      {errors.map((error) => (
        <p key={error}>{error}</p>
      ))}
    </div>
  )
}

/** One line of text, a number, a date and time, a password: whatever an `input` takes. */
export function TextField({
  name,
  id,
  label,
  hint,
  errors,
  ...input
}: FieldProps & InputHTMLAttributes<HTMLInputElement> & { ref?: React.Ref<HTMLInputElement> }) {
  return (
    <Field name={name} id={id} label={label} hint={hint} errors={errors}>
      {(wiring) => <input {...input} {...wiring} className={CONTROL} />}
    </Field>
  )
}

/** Several lines of text. */
export function TextAreaField({
  name,
  id,
  label,
  hint,
  errors,
  ...area
}: FieldProps & TextareaHTMLAttributes<HTMLTextAreaElement> & { ref?: React.Ref<HTMLTextAreaElement> }) {
  return (
    <Field name={name} id={id} label={label} hint={hint} errors={errors}>
      {(wiring) => <textarea rows={6} {...area} {...wiring} className={CONTROL} />}
    </Field>
  )
}

/** One of a list. */
export function SelectField({
  name,
  label,
  hint,
  errors,
  options,
  id,
  ...select
}: FieldProps &
  SelectHTMLAttributes<HTMLSelectElement> & {
    options: readonly { value: string; label: string }[]
    ref?: React.Ref<HTMLSelectElement>
  }) {
  return (
    <Field name={name} id={id} label={label} hint={hint} errors={errors}>
      {(wiring) => (
        <select {...select} {...wiring} className={CONTROL}>
          {options.map((option) => (
            <option key={option.value} value={option.value}>
              {option.label}
            </option>
          ))}
        </select>
      )}
    </Field>
  )
}

/** A box to tick, with its words behind it; the whole line is the target. */
export function CheckField({
  name,
  id: given,
  label,
  hint,
  errors = [],
  ...input
}: FieldProps & InputHTMLAttributes<HTMLInputElement> & { ref?: React.Ref<HTMLInputElement> }) {
  const own = useId()
  const id = given ?? own
  const described = [
    ...(hint === undefined ? [] : [`${id}-hint`]),
    ...(errors.length === 0 ? [] : [`${id}-error`]),
  ]
  return (
    <div className="mb-4">
      <label htmlFor={id} className="flex min-h-8 items-center gap-2.5 pointer-coarse:min-h-11">
        <input
          {...input}
          id={id}
          name={name}
          type="checkbox"
          aria-describedby={described.join(' ') || undefined}
          aria-invalid={errors.length > 0 || undefined}
          className="size-5 shrink-0 accent-ink"
        />
        <span>{label}</span>
      </label>
      {hint !== undefined && (
        <p id={`${id}-hint`} className="ml-7.5 text-sm text-ink-2">
          {hint}
        </p>
      )}
      <FieldErrors id={`${id}-error`} errors={errors} />
    </div>
  )
}
