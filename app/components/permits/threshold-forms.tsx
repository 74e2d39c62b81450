/** Forms of one threshold: to adopt a value in place of what holds, and to end it. */
import { Form, useNavigation } from 'react-router'
import { type AdoptedThreshold, THRESHOLDS, type ThresholdKey } from '#app/domain/hazard-thresholds.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'

const YEAR_MS = 365 * 86_400_000

/** A failure of the form of that act; other forms of the page are left alone. */
export function failureOf(failure: ActionFailure | undefined, act: string): ActionFailure | undefined {
  return failure?.typed?.act === act ? failure : undefined
}

export function AdoptForm({
  threshold,
  open,
  failure,
}: {
  threshold: ThresholdKey
  open: AdoptedThreshold | null
  failure: ActionFailure | undefined
}) {
  const { zone, now } = useSite()
  const sending = useNavigation().formMethod === 'POST'
  const { unit, least, most } = THRESHOLDS[threshold]
  const typed = failure?.typed
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <Hidden act="adopt" threshold={threshold} open={open} />
      <TextField
        name="value"
        label={`Value of this site, ${unit}`}
        inputMode="decimal"
        autoComplete="off"
        required
        hint={`From ${least} to ${most} ${unit}.`}
        defaultValue={typed?.value ?? (open === null ? '' : String(open.value))}
        errors={failure?.fields.value}
      />
      <TextField
        name="source"
        label="Comes from"
        autoComplete="off"
        required
        maxLength={200}
        hint="The law, the standard or the site’s own ruling."
        defaultValue={typed?.source ?? open?.source ?? ''}
        errors={failure?.fields.source}
      />
      <TextField
        name="edition"
        label="Edition or date of it"
        autoComplete="off"
        required
        maxLength={80}
        defaultValue={typed?.edition ?? open?.edition ?? ''}
        errors={failure?.fields.edition}
      />
      <SiteTimeField
        name="reviewAt"
        label="Look at it again by"
        at={new Date(now.getTime() + YEAR_MS)}
        typed={typed?.reviewAt}
        zone={zone}
        hint="From then on it counts as not set."
        errors={failure?.fields.reviewAt}
      />
      <ReasonAndPassword failure={failure} />
      <Button kind="primary" disabled={sending}>
        Adopt and sign
      </Button>
    </Form>
  )
}

export function EndForm({ open, failure }: { open: AdoptedThreshold; failure: ActionFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <Hidden act="end" threshold={open.key} open={open} />
      <p className="mb-3 text-ink-2">
        The threshold is then not set: permits that rest on it cannot be approved until another value has been
        adopted.
      </p>
      <ReasonAndPassword failure={failure} />
      <Button kind="danger" disabled={sending}>
        End it and sign
      </Button>
    </Form>
  )
}

/** The size of a bay, for the oxygen that venting would leave. */
export function BayForm({
  settingId,
  volumeM3,
  failure,
}: {
  settingId: number
  volumeM3: number
  failure: ActionFailure | undefined
}) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <input type="hidden" name="act" value="bay-volume" />
      <input type="hidden" name="seen" value={settingId} />
      <TextField
        name="volumeM3"
        label="Space of a bay, m³"
        inputMode="decimal"
        autoComplete="off"
        required
        hint="Between the doors or curtains that keep air apart; the smallest one, where they differ."
        defaultValue={failure?.typed?.volumeM3 ?? (settingId === 0 ? '' : String(volumeM3))}
        errors={failure?.fields.volumeM3}
      />
      <ReasonAndPassword failure={failure} />
      <Button disabled={sending}>Set and sign</Button>
    </Form>
  )
}

function Hidden({
  act,
  threshold,
  open,
}: {
  act: 'adopt' | 'end'
  threshold: ThresholdKey
  open: AdoptedThreshold | null
}) {
  return (
    <>
      <input type="hidden" name="act" value={act} />
      <input type="hidden" name="key" value={threshold} />
      <input type="hidden" name="seen" value={open?.id ?? 0} />
    </>
  )
}

function ReasonAndPassword({ failure }: { failure: ActionFailure | undefined }) {
  return (
    <>
      <TextAreaField
        name="reason"
        label="Why"
        rows={2}
        required
        minLength={10}
        maxLength={500}
        hint="It stands on the record beside the signature."
        defaultValue={failure?.typed?.reason ?? ''}
        errors={failure?.fields.reason}
      />
      <TextField
        name="password"
        label="Your password"
        type="password"
        autoComplete="current-password"
        required
        hint="Your signature, for this act alone."
        errors={failure?.fields.password}
      />
    </>
  )
}
