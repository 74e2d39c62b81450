/** One number of a trial: a slider for the hand, a field for the exact figure, and its grounds a click away. */
import { memo, useId } from 'react'
import { Link } from 'react-router'
import {
  type WhatIfField as Field,
  numberText,
  sliderStepOf,
  sliderSteps,
  sliderValueAt,
} from '#app/domain/what-if.ts'

/**
 * @param typed what stands in the field where it differs from the value: half typed, or not to be used
 * @param alive whether a script can move the slider
 */
export const WhatIfField = memo(function WhatIfField({
  field,
  value,
  typed,
  error,
  alive,
  onValue,
  onTyped,
  onLeave,
}: {
  field: Field
  value: number
  typed: string | undefined
  error: string | undefined
  alive: boolean
  /** Called with the field, so that the same three do for all: a field that nothing touches is not made anew. */
  onValue: (field: Field, value: number) => void
  onTyped: (field: Field, text: string) => void
  onLeave: (field: Field) => void
}) {
  const id = useId()
  const { key, label, unit, slider, usual } = field
  const moved = value !== usual
  return (
    <div className="border-t border-rule-2 py-2.5 first:border-t-0">
      <div className="flex items-center justify-between gap-3">
        <label htmlFor={id} className="min-w-0 font-medium">
          {label}
        </label>
        <span className="flex shrink-0 items-center gap-1.5">
          <input
            id={id}
            name={key}
            inputMode="decimal"
            autoComplete="off"
            value={typed ?? numberText(value)}
            onChange={(event) => onTyped(field, event.target.value)}
            onBlur={() => onLeave(field)}
            aria-invalid={error !== undefined || undefined}
            aria-describedby={`${id}-unit${error === undefined ? '' : ` ${id}-error`}`}
            className="min-h-9 w-26 rounded-md border border-edge bg-sheet px-2 text-right text-ink aria-invalid:border-2 aria-invalid:border-bad pointer-coarse:min-h-11"
          />
          <span id={`${id}-unit`} className="w-20 text-sm whitespace-nowrap text-ink-2">
            {unit}
          </span>
        </span>
      </div>
      <input
        type="range"
        aria-label={`${label}, slider`}
        aria-valuetext={`${numberText(value)} ${unit}`}
        min={0}
        max={sliderSteps(slider)}
        step={1}
        value={sliderStepOf(slider, value)}
        onChange={(event) => onValue(field, sliderValueAt(slider, Number(event.target.value)))}
        className={`mt-1 h-6 w-full accent-ink print:hidden pointer-coarse:h-11 ${alive ? '' : 'invisible'}`}
      />
      {error !== undefined && (
        <p id={`${id}-error`} className="text-sm text-bad">
          {error}
        </p>
      )}
      <details className="text-sm text-ink-2">
        <summary className="py-0.5 pointer-coarse:py-3">
          {moved ? `Moved from ${numberText(usual)} ${unit}` : 'Where it is from'}
        </summary>
        <p>{field.basis}</p>
        <p>
          {field.source.text}{' '}
          {field.source.to !== undefined && (
            <Link to={field.source.to} className="link">
              Register entry
            </Link>
          )}
        </p>
      </details>
    </div>
  )
})
