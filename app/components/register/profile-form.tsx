/** How a source's files are read, where no file can say it: curves of volts, the start of a gauge, the column that counts. */
import { Form, useNavigation } from 'react-router'
import {
  CURVE_FIELDS,
  ProfileReadingSchema,
  READING_COLUMN_LABELS,
} from '#app/domain/schemas/profile-reading.ts'
import type { ProfilePart } from '#app/services/source-profile.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { SuggestField } from './register-fields.tsx'
import { Conflict, ReasonField, type RegisterFailure } from './thing-form.tsx'
import { type CheckedForm, useCheckedForm } from './use-checked-form.ts'

export const PROFILE_INTENT = 'profile-reading'

/** Empty rows for further curves. */
const MORE_ROWS = 2

const LABELS: Record<(typeof CURVE_FIELDS)[number], string> = {
  channel: 'Channel of the pressure',
  voltsPerDecade: 'Volts a decade',
  voltsAtUnit: 'Volts at one of the unit',
  unit: 'Unit',
  voltsChannel: 'Channel that keeps the volts',
}

export function ProfileForm({
  profile,
  failure: answered,
}: {
  profile: ProfilePart
  failure: RegisterFailure | undefined
}) {
  const { failure, errorsOf, onSubmit } = useCheckedForm(ProfileReadingSchema, answered)
  const sending = useNavigation().formMethod === 'POST'
  const typed = answered?.typed
  return (
    <Form method="post" noValidate onSubmit={onSubmit}>
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value={PROFILE_INTENT} />
      <input type="hidden" name="seen" value={typed?.seen ?? profile.version} />
      <p className="mb-3">
        This makes version {profile.version + 1} of the way of reading. Files taken in from then on are read
        by it; those read before stay as they are.
      </p>
      <div className="grid gap-x-4 sm:grid-cols-2">
        <TextField
          name="startingMinutes"
          label="A gauge that was switched on is starting for, min"
          hint="Its readings are kept in this time and count as starting. 0: none."
          inputMode="decimal"
          defaultValue={typed?.startingMinutes ?? String(profile.startingMinutes)}
          errors={errorsOf('startingMinutes')}
        />
        <SelectField
          name="readingColumn"
          label="Of lowest, highest and mean, the reading is"
          defaultValue={typed?.readingColumn ?? profile.readingColumn ?? ''}
          options={Object.entries(READING_COLUMN_LABELS).map(([value, label]) => ({ value, label }))}
          errors={errorsOf('readingColumn')}
        />
      </div>
      <p className="mb-2">
        Curves of channels whose columns hold volts on a logarithmic scale, as the manual or the certificate
        of the gauge gives them. To take one away, empty its fields.
      </p>
      {Array.from({ length: profile.curves.length + MORE_ROWS }, (_, row) => (
        <CurveRow
          // biome-ignore lint/suspicious/noArrayIndexKey: a row is its number, which its fields carry in their names
          key={row}
          row={row}
          profile={profile}
          typed={typed}
          errorsOf={errorsOf}
        />
      ))}
      <ReasonField typed={typed} errors={errorsOf('reason')} />
      <Conflict failure={answered} />
      <Button kind="primary" disabled={sending}>
        {sending ? 'Saving' : 'Save as the next version'}
      </Button>
    </Form>
  )
}

function CurveRow({
  row,
  profile,
  typed,
  errorsOf,
}: {
  row: number
  profile: ProfilePart
  typed: Readonly<Record<string, string>> | undefined
  errorsOf: CheckedForm['errorsOf']
}) {
  const curve = profile.curves[row]
  return (
    <fieldset className="mb-3 grid gap-x-4 rounded-md border px-3 pt-2 sm:grid-cols-2">
      <legend className="px-1">{curve === undefined ? 'Another curve' : `Curve of ${curve.channel}`}</legend>
      {CURVE_FIELDS.map((field) => {
        const name = `${field}${row}`
        const start = typed?.[name] ?? String(curve?.[field] ?? '')
        const facts = { name, label: LABELS[field], errors: errorsOf(name) }
        if (field === 'channel')
          return <SuggestField key={field} {...facts} start={start} choices={profile.pressureChannels} />
        if (field === 'voltsChannel')
          return (
            <SuggestField
              key={field}
              {...facts}
              hint="Empty: the volts themselves are not kept."
              start={start}
              choices={profile.channels}
            />
          )
        return (
          <TextField
            key={field}
            {...facts}
            inputMode={field === 'unit' ? 'text' : 'decimal'}
            defaultValue={start}
          />
        )
      })}
    </fieldset>
  )
}
