/** A field of the register's forms from its facts, filled with what was typed or with what is recorded. */
import type { FieldFact } from '#app/domain/schemas/register-fields.ts'
import type { FieldValue } from '#app/domain/schemas/register-values.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { Typed } from '../forms/failure.ts'
import { CheckField, SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { fieldTime } from '../ui/site-time.ts'
import { isPlain } from './cell-view.tsx'

/** What a field starts with: a recorded value as a form would send it. */
function startText(field: FieldFact, value: FieldValue, zone: string): string {
  if (value === null) return ''
  if (value instanceof Date) {
    // The last day that counts is the one before the instant at which it no longer does.
    if (field.input === 'last-day') return fieldTime(new Date(value.getTime() - 1), zone).slice(0, 10)
    return timeWithSeconds(value, zone)
  }
  // A number starts as people write it: 5e+19 and not a row of zeros.
  if (typeof value === 'number')
    return isPlain(value) ? String(value) : value.toExponential().replace('+', '')
  return String(value)
}

/** Site time for a field; with its seconds where there are any, so that saving the form does not drop them. */
function timeWithSeconds(at: Date, zone: string): string {
  const seconds = at.getUTCSeconds()
  return seconds === 0 ? fieldTime(at, zone) : `${fieldTime(at, zone)}:${String(seconds).padStart(2, '0')}`
}

export function RegisterField({
  field,
  value,
  typed,
  zone,
  segments,
  errors,
}: {
  field: FieldFact
  /** The recorded value; null for none. */
  value: FieldValue
  typed: Typed | undefined
  zone: string
  segments: readonly string[]
  errors: readonly string[] | undefined
}) {
  const common = {
    name: field.name,
    label: field.unit === '' ? field.label : `${field.label}, ${field.unit}`,
    hint: field.hint === '' ? undefined : field.hint,
    errors,
  }
  const start = typed === undefined ? startText(field, value, zone) : (typed[field.name] ?? '')
  if (field.input === 'tick') {
    return <CheckField {...common} defaultChecked={typed === undefined ? value === true : start === 'on'} />
  }
  if (field.input === 'choice') {
    const mayStayOpen = field.options.some((option) => option.value === '')
    const choose = value === null && !mayStayOpen ? [{ value: '', label: 'Choose' }] : []
    return <SelectField {...common} defaultValue={start} options={[...choose, ...field.options]} />
  }
  if (field.input === 'segment') return <SegmentField {...common} start={start} segments={segments} />
  if (field.input === 'long-text') return <TextAreaField {...common} rows={2} defaultValue={start} />
  if (field.input === 'instant') return <TimeField {...common} start={start} />
  return (
    <TextField
      {...common}
      // A number keypad has no "e" and no comma; text with this mode keeps both within reach.
      inputMode={field.input === 'number' ? 'decimal' : undefined}
      defaultValue={start}
    />
  )
}

interface Common {
  name: string
  label: string
  hint?: string | undefined
  errors: readonly string[] | undefined
}

/** One segment of the list, or none. */
export function SegmentField({
  start,
  segments,
  none = 'None',
  ...common
}: Common & { start: string; segments: readonly string[]; none?: string }) {
  const options = [{ value: '', label: none }, ...segments.map((tag) => ({ value: tag, label: tag }))]
  return <SelectField {...common} defaultValue={start} options={options} />
}

/** A site time that may stay empty: text, because the browser's own field has no place for an offset. */
export function TimeField({ start, hint, ...common }: Common & { start: string }) {
  const { zone } = useSite()
  const form = `Year-month-day hour:minute, site time (${zone}).`
  return (
    <TextField
      {...common}
      hint={hint === undefined ? form : `${hint} ${form}`}
      autoComplete="off"
      defaultValue={start.replace('T', ' ')}
    />
  )
}

/** Text with suggestions from a list; anything may be typed, and the server says when it is unknown. */
export function SuggestField({
  start,
  choices,
  ...common
}: Common & { start: string; choices: readonly string[] }) {
  const list = `${common.name}-choices`
  return (
    <>
      <TextField {...common} list={list} autoComplete="off" defaultValue={start} />
      <datalist id={list}>
        {choices.map((choice) => (
          <option key={choice} value={choice} />
        ))}
      </datalist>
    </>
  )
}
