/** A person's own settings. Each is a small form that saves by itself. */
import { Form, Link } from 'react-router'
import type { Preferences } from '#app/context.ts'
import { ROLE_LABELS, type Role, rolesHave } from '#app/domain/roles.ts'
import type { ActionFailure } from './forms/failure.ts'
import { FormFailure } from './forms/form-failure.tsx'
import { Button } from './ui/button.tsx'
import { PRESSURE_UNITS, pressureText } from './ui/format-pressure.ts'
import { Facts, PageHead, Panel } from './ui/panel.tsx'

const THEMES: readonly { value: Preferences['theme']; label: string; hint: string }[] = [
  { value: 'system', label: 'As the device', hint: 'Follows the setting of the screen you sit at.' },
  { value: 'light', label: 'Light', hint: 'For the day and for the tunnel.' },
  { value: 'dark', label: 'Dark', hint: 'For night shifts.' },
]
const SAMPLE_PA = 2.1e-7

export function AccountPage({
  name,
  roles,
  preferences,
  failure,
}: {
  name: string
  roles: readonly Role[]
  preferences: Preferences
  failure: ActionFailure | undefined
}) {
  return (
    <>
      <PageHead title="Your settings">They go with you to every screen you sign in at.</PageHead>
      <FormFailure failure={failure} />
      <div className="grid max-w-3xl items-start gap-x-4.5 md:grid-cols-2">
        <Panel title="Unit of pressure">
          <Choice
            name="pressureUnit"
            legend="Show pressures in"
            chosen={failure?.typed?.pressureUnit ?? preferences.pressureUnit}
            errors={failure?.fields.pressureUnit}
            options={PRESSURE_UNITS.map((unit) => ({
              value: unit,
              label: unit,
              hint: pressureText(SAMPLE_PA, unit),
            }))}
          />
        </Panel>
        <Panel title="Theme">
          <Choice
            name="theme"
            legend="Light or dark"
            chosen={failure?.typed?.theme ?? preferences.theme}
            errors={failure?.fields.theme}
            options={THEMES}
          />
        </Panel>
        <Panel title="Signed in as">
          <Facts
            items={[
              { name: 'Name', value: name },
              { name: 'Roles in force', value: roles.map((role) => ROLE_LABELS[role]).join(', ') || 'none' },
            ]}
          />
          <p className="mt-2 text-sm text-ink-2">Roles are granted, dated and ended by the administrator.</p>
          {rolesHave(roles, 'grant:confirm') && (
            <p className="mt-2">
              <Link to="/people/waiting" className="link inline-block py-0.5">
                Roles that wait for a second person
              </Link>
            </p>
          )}
        </Panel>
      </div>
    </>
  )
}

function Choice({
  name,
  legend,
  chosen,
  options,
  errors = [],
}: {
  name: string
  legend: string
  chosen: string
  options: readonly { value: string; label: string; hint: string }[]
  errors?: readonly string[] | undefined
}) {
  return (
    <Form method="post">
      <fieldset className="mb-3">
        <legend className="sr-only">{legend}</legend>
        {options.map(({ value, label, hint }) => (
          <label key={value} className="flex min-h-10 items-center gap-2.5 pointer-coarse:min-h-11">
            <input
              type="radio"
              name={name}
              value={value}
              defaultChecked={value === chosen}
              className="size-5 shrink-0 accent-ink"
            />
            <span className="font-medium whitespace-nowrap">{label}</span>
            <span className="text-sm text-ink-2">{hint}</span>
          </label>
        ))}
        {errors.map((error) => (
          <p key={error} className="text-sm text-bad">
            {error}
          </p>
        ))}
      </fieldset>
      <Button>Save</Button>
    </Form>
  )
}
