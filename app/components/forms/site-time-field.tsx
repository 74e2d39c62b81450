import type { InputHTMLAttributes } from 'react'
import { TextField } from '../ui/field.tsx'
import { offsetLabel, typedTime } from '../ui/site-time.ts'

/**
 * A date and time in site time, as text with the year first. The browser's own field shows the day and the month in an
 * order of its own, and has no place for the offset that the hour which comes twice in autumn needs.
 *
 * @param at what stands in it at first
 * @param typed what was typed before the form was refused, readable or not; it comes back as it was
 * @param hint goes before the words about how to write it
 */
export function SiteTimeField({
  name,
  label,
  at,
  typed,
  zone,
  hint,
  errors,
  ...input
}: {
  name: string
  label: string
  at: Date
  typed?: string | undefined
  zone: string
  hint?: string
  errors?: readonly string[] | undefined
} & Omit<InputHTMLAttributes<HTMLInputElement>, 'type' | 'defaultValue' | 'name'> & {
    ref?: React.Ref<HTMLInputElement>
  }) {
  return (
    <TextField
      {...input}
      name={name}
      label={label}
      defaultValue={typed ?? typedTime(at, zone)}
      autoComplete="off"
      spellCheck={false}
      required
      hint={`${hint === undefined ? '' : `${hint} `}Year-month-day hour:minute, site time (${zone}, now ${offsetLabel(at, zone)}).`}
      errors={errors}
    />
  )
}
