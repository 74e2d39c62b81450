/** What the forms of the policy page share. */
import type { ActionFailure } from '../forms/failure.ts'
import { TextField } from '../ui/field.tsx'

/** The failure of a form of one of these intents; nothing when another form was refused. */
export function ownFailure(
  failure: ActionFailure | undefined,
  ...intents: string[]
): ActionFailure | undefined {
  return intents.includes(failure?.typed?.intent ?? '') ? failure : undefined
}

export function SignatureField({ errors }: { errors: readonly string[] | undefined }) {
  return (
    <TextField
      name="password"
      label="Your own password, as your signature"
      type="password"
      autoComplete="current-password"
      required
      errors={errors}
    />
  )
}
