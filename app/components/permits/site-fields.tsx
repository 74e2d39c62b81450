/** Fields of the tablet pages: a choice in large targets, whoever did it, the signature. */
import { useId } from 'react'
import type { Typed } from '../forms/failure.ts'
import { SelectField, TextField } from '../ui/field.tsx'

/** A choice between a few words, nothing chosen until somebody chooses; each word is a target of its own. */
export function ChoiceField({
  name,
  label,
  options,
  chosen,
  errors = [],
  required = true,
}: {
  name: string
  label: string
  options: readonly { value: string; label: string }[]
  chosen: string | undefined
  errors?: readonly string[] | undefined
  required?: boolean
}) {
  const errorId = useId()
  return (
    <fieldset
      className="mb-4"
      aria-describedby={errors.length > 0 ? errorId : undefined}
      aria-invalid={errors.length > 0 || undefined}
    >
      <legend className="mb-1 font-medium">{label}</legend>
      <div className="grid gap-2 sm:grid-cols-2">
        {options.map((option) => (
          <label
            key={option.value}
            className="flex min-h-14 items-center gap-3 rounded-md border border-edge bg-sheet px-3"
          >
            <input
              type="radio"
              name={name}
              value={option.value}
              defaultChecked={chosen === option.value}
              required={required}
              className="size-6 shrink-0 accent-ink"
            />
            {option.label}
          </label>
        ))}
      </div>
      {errors.length > 0 && (
        <div id={errorId} className="mt-1 text-sm text-bad">
          {errors.map((error) => (
            <p key={error}>{error}</p>
          ))}
        </div>
      )}
    </fieldset>
  )
}

/** Who did it: the signed-in person, or somebody without a log-in before them as a witness. */
export function DoneByField({
  label,
  self,
  witnessed,
  typed,
  errors,
}: {
  label: string
  self: string
  witnessed: readonly { personId: number; name: string }[]
  typed: Typed | undefined
  errors?: readonly string[] | undefined
}) {
  if (witnessed.length === 0) return null
  return (
    <SelectField
      name="by"
      label={label}
      defaultValue={typed?.by ?? ''}
      options={[
        { value: '', label: `${self} (I did it myself)` },
        ...witnessed.map(({ personId, name }) => ({
          value: String(personId),
          label: `${name}, who has no log-in here; I saw it done`,
        })),
      ]}
      errors={errors}
    />
  )
}

/** The signer's own password. It says whose, since the tablet may be somebody else's. */
export function SignatureField({ name, errors }: { name: string; errors?: readonly string[] | undefined }) {
  return (
    <TextField
      name="password"
      type="password"
      label={`Password of ${name}, as your signature`}
      autoComplete="current-password"
      required
      errors={errors}
    />
  )
}
