/** The written procedure for a lock whose owner is not there, at a point or on the lock box. */
import { Form, useNavigation } from 'react-router'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { TextAreaField } from '../ui/field.tsx'
import { SignatureField } from './site-fields.tsx'
import { SiteStep, SiteSubmit } from './site-frame.tsx'

/** The refusal of one form among many: the one of this act at this lock or point. */
export function failureOf(
  failure: ActionFailure | undefined,
  act: string,
  of: { name: 'pointId' | 'tag' | 'boxLockId'; value: string | number },
): ActionFailure | undefined {
  const typed = failure?.typed
  return typed?.act === act && typed[of.name] === String(of.value) ? failure : undefined
}

export function AbsentForm({
  act,
  field,
  revision,
  what,
  name,
  failure,
}: {
  act: 'remove-absent' | 'box-off-absent'
  field: { name: 'pointId' | 'boxLockId'; value: number }
  revision?: number
  what: string
  name: string
  failure: ActionFailure | undefined
}) {
  const mine = failureOf(failure, act, field)
  const sending = useNavigation().formMethod === 'POST'
  const ask = (key: 'verifiedAbsent' | 'efforts' | 'informed', label: string) => (
    <TextAreaField
      name={key}
      label={label}
      rows={3}
      required
      minLength={10}
      maxLength={500}
      defaultValue={mine?.typed?.[key]}
      errors={mine?.fields[key]}
    />
  )
  return (
    <SiteStep label="Its owner is not on site" open={mine !== undefined}>
      <p className="mb-3">
        {what} comes off without them only in writing, signed by an officer or engineer, when all three are
        true.
      </p>
      <Form method="post">
        <FormFailure failure={mine} />
        <input type="hidden" name="act" value={act} />
        <input type="hidden" name={field.name} value={field.value} />
        {revision !== undefined && <input type="hidden" name="revision" value={revision} />}
        {ask('verifiedAbsent', 'How you made sure that the owner is not on site')}
        {ask('efforts', 'What was done to reach and tell the owner')}
        {ask('informed', 'How the owner will know before they resume work')}
        <SignatureField name={name} errors={mine?.fields.password} />
        <SiteSubmit kind="danger" sending={sending}>
          Sign: taken away, owner absent
        </SiteSubmit>
      </Form>
    </SiteStep>
  )
}
