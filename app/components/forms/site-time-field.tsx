import type { InputHTMLAttributes } from 'react'
import { useState } from 'react'
import { TextField } from '../ui/field.tsx'
import { fieldTime } from '../ui/site-time.ts'

/**
 * A date and time in site time. The browser's own field has no place for an offset, which the hour that comes twice in
 * autumn needs: once the answer asks for one, the field takes free text, and keeps taking it.
 *
 * @param at what stands in it at first
 */
export function SiteTimeField({
  name,
  label,
  at,
  zone,
  hint,
  errors = [],
  ...input
}: {
  name: string
  label: string
  at: Date
  zone: string
  hint?: string
  errors?: readonly string[] | undefined
} & Omit<InputHTMLAttributes<HTMLInputElement>, 'type' | 'defaultValue' | 'name'> & {
    ref?: React.Ref<HTMLInputElement>
  }) {
  const asksOffset = errors.some((error) => error.includes('offset'))
  const [free, setFree] = useState(asksOffset)
  if (asksOffset && !free) setFree(true)
  return (
    <TextField
      {...input}
      name={name}
      label={label}
      type={free ? 'text' : 'datetime-local'}
      defaultValue={fieldTime(at, zone)}
      required
      hint={hint ?? `Site time (${zone}).`}
      errors={errors}
    />
  )
}
