/** Fields of the permit form, each known by its name alone: what stands in it, what is wrong with it, and where it is. */
import { createContext, useContext, useId } from 'react'
import { type FieldPath, get, useFormContext, useFormState } from 'react-hook-form'
import type { FieldErrors } from '#app/domain/errors.ts'
import type { PermitFormValues } from '#app/domain/permit-form-values.ts'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'

type Name = FieldPath<PermitFormValues>

interface PageFacts {
  /** What the page came with: without script, all that fills the fields. */
  values: PermitFormValues
  /** What the server found wrong with what was sent. */
  errors: FieldErrors
}

const PageContext = createContext<PageFacts | null>(null)
export const PermitFieldsProvider = PageContext.Provider

/** The address of a field on its page. Fields of a list that is still empty are where the list is. */
export function fieldAddress(name: string): string {
  return `field-${name === 'segments' ? 'segment' : name}`
}

/** What is wrong with a field: what was found here comes before what the server found. */
export function useFieldErrors(name: string): string[] {
  const { control } = useFormContext<PermitFormValues>()
  const { errors } = useFormState({ control })
  const found: unknown = get(errors, name)
  const page = useContext(PageContext)
  if (typeof found === 'object' && found !== null) {
    const { message, root } = found as { message?: string; root?: { message?: string } }
    const said = message ?? root?.message
    if (said !== undefined && said !== '') return [said]
  }
  return page?.errors[name] ?? []
}

function useField(name: Name) {
  const { register } = useFormContext<PermitFormValues>()
  const page = useContext(PageContext)
  const start: unknown = get(page?.values ?? {}, name)
  return {
    ...register(name),
    id: fieldAddress(name),
    defaultValue: typeof start === 'string' ? start : '',
    errors: useFieldErrors(name),
  }
}

interface Common {
  name: Name
  label: React.ReactNode
  hint?: React.ReactNode
}

export function Line({ name, label, hint, most = 200 }: Common & { most?: number }) {
  return <TextField {...useField(name)} label={label} hint={hint} maxLength={most} autoComplete="off" />
}

/** A number keypad has no comma on every device; text with this mode keeps both within reach. */
export function Figure({ name, label, hint }: Common) {
  return <TextField {...useField(name)} label={label} hint={hint} inputMode="decimal" autoComplete="off" />
}

export function Lines({ name, label, hint, rows = 3 }: Common & { rows?: number }) {
  return <TextAreaField {...useField(name)} label={label} hint={hint} rows={rows} maxLength={4000} />
}

export interface Option {
  value: string
  label: string
}

export function Choice({ name, label, hint, options }: Common & { options: readonly Option[] }) {
  return <SelectField {...useField(name)} label={label} hint={hint} options={options} />
}

/** One of few, none of them chosen until somebody does. */
export function Radios({
  name,
  label,
  hint,
  options,
  quiet = false,
}: Common & { options: readonly Option[]; quiet?: boolean }) {
  const { defaultValue, errors, id, ...wiring } = useField(name)
  const about = useId()
  return (
    <fieldset
      id={id}
      tabIndex={-1}
      aria-describedby={errors.length > 0 || hint !== undefined ? about : undefined}
      className="mb-4 min-w-0"
    >
      <legend className={quiet ? 'sr-only' : 'mb-1 font-medium'}>{label}</legend>
      <div className="flex flex-wrap gap-x-6">
        {options.map((option) => (
          <label
            key={option.value}
            htmlFor={`${id}-${option.value}`}
            className="flex min-h-10 items-center gap-2.5 pointer-coarse:min-h-11"
          >
            <input
              {...wiring}
              id={`${id}-${option.value}`}
              type="radio"
              value={option.value}
              defaultChecked={defaultValue === option.value}
              aria-invalid={errors.length > 0 || undefined}
              className="size-5 shrink-0 accent-ink"
            />
            {option.label}
          </label>
        ))}
      </div>
      <div id={about} className="text-sm">
        {hint !== undefined && <p className="mt-1 text-ink-2">{hint}</p>}
        {errors.map((error) => (
          <p key={error} className="mt-1 text-bad">
            {error}
          </p>
        ))}
      </div>
    </fieldset>
  )
}

/** Several of a list, each with a box. */
export function Boxes({
  name,
  label,
  hint,
  options,
}: {
  name: 'deputyIds' | 'crewIds'
  label: string
  hint?: string
  options: readonly Option[]
}) {
  const { register } = useFormContext<PermitFormValues>()
  const page = useContext(PageContext)
  const ticked = page?.values[name] ?? []
  const errors = useFieldErrors(name)
  const about = useId()
  const id = fieldAddress(name)
  return (
    <fieldset
      id={id}
      tabIndex={-1}
      aria-describedby={errors.length > 0 || hint !== undefined ? about : undefined}
      className="mb-4 min-w-0"
    >
      <legend className="mb-1 font-medium">{label}</legend>
      <div id={about} className="text-sm">
        {hint !== undefined && <p className="mb-1 text-ink-2">{hint}</p>}
        {errors.map((error) => (
          <p key={error} className="mb-1 text-bad">
            {error}
          </p>
        ))}
      </div>
      <ul>
        {options.map((option) => (
          <li key={option.value}>
            <label
              htmlFor={`${id}-${option.value}`}
              className="flex min-h-10 items-center gap-2.5 pointer-coarse:min-h-11"
            >
              <input
                {...register(name)}
                id={`${id}-${option.value}`}
                type="checkbox"
                value={option.value}
                defaultChecked={ticked.includes(option.value)}
                className="size-5 shrink-0 accent-ink"
              />
              <span className="min-w-0">{option.label}</span>
            </label>
          </li>
        ))}
      </ul>
    </fieldset>
  )
}
