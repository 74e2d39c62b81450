import { Form, useLocation } from 'react-router'
import type { PressureUnit } from '#app/context.ts'
import { PRESSURE_UNITS } from './format-pressure.ts'

/** The unit pressures are shown in: kept with the person, changed from any page, by a plain form. */
export function UnitSwitch({ unit }: { unit: PressureUnit }) {
  const { pathname, search } = useLocation()
  return (
    <Form method="post" action="/account" preventScrollReset>
      <input type="hidden" name="from" value={pathname + search} />
      <fieldset className="flex overflow-hidden rounded-md border">
        <legend className="sr-only">Unit of pressure</legend>
        {PRESSURE_UNITS.map((choice) => (
          <button
            key={choice}
            type="submit"
            name="pressureUnit"
            value={choice}
            aria-pressed={choice === unit}
            className="min-h-8 min-w-8 border-l px-2 text-ink-2 first-of-type:border-l-0 hover:bg-rule-2 focus-visible:-outline-offset-2 aria-pressed:bg-ink aria-pressed:text-sheet pointer-coarse:min-h-11 pointer-coarse:min-w-11"
          >
            {choice}
          </button>
        ))}
      </fieldset>
    </Form>
  )
}
