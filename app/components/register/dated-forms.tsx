/** The forms that write a dated row: a channel's position, a position's instrument, a pump's place, a limit. */
import { useMemo } from 'react'
import { Form, useNavigation } from 'react-router'
import {
  channelMapSchema,
  clockCorrectionSchema,
  fittingSchema,
  limitSchema,
  placementSchema,
} from '#app/domain/schemas/register-dated.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { DatedForm } from '#app/services/register-dated.server.ts'
import type { Typed } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { SegmentField, SuggestField, TimeField } from './register-fields.tsx'
import { Conflict, ReasonField, type RegisterFailure } from './thing-form.tsx'
import { type CheckedForm, useCheckedForm } from './use-checked-form.ts'

const SCHEMAS = {
  'channel-map': channelMapSchema,
  fitting: fittingSchema,
  placement: placementSchema,
  limit: limitSchema,
  'clock-correction': clockCorrectionSchema,
}

/** What each form is called on its page, and on its button. */
export const DATED_TITLES: Record<DatedForm['form'], { title: string; button: string }> = {
  'channel-map': { title: 'Change where this channel belongs', button: 'Save the map' },
  fitting: { title: 'Exchange or take out the instrument', button: 'Save the exchange' },
  placement: { title: 'Move this pump', button: 'Save the place' },
  'clock-correction': { title: 'Correct the clock of this source', button: 'Save the correction' },
  limit: { title: 'Set this limit', button: 'Set the limit' },
}

interface Part {
  typed: Typed | undefined
  errorsOf: CheckedForm['errorsOf']
  segments: readonly string[]
}

export function DatedRowForm({
  form,
  segments,
  failure: answered,
  suggested,
}: {
  form: DatedForm
  segments: readonly string[]
  failure: RegisterFailure | undefined
  /** What the address asks the form to start with; what was typed goes before it. */
  suggested?: Typed | undefined
}) {
  const { zone, now } = useSite()
  const schema = useMemo(() => SCHEMAS[form.form](zone), [form.form, zone])
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useNavigation().formMethod === 'POST'
  const typed = answered?.typed ?? suggested
  const part = { typed, errorsOf, segments }
  const clock = form.form === 'clock-correction'
  const ends = form.form === 'channel-map' || form.form === 'fitting' || clock
  return (
    <Form method="post" noValidate onSubmit={onSubmit}>
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value={form.form} />
      <input type="hidden" name="seen" value={typed?.seen ?? form.seen} />
      {form.form === 'channel-map' && <ChannelMapPart {...part} form={form} />}
      {form.form === 'fitting' && <FittingPart {...part} form={form} />}
      {form.form === 'placement' && <PlacementPart {...part} form={form} />}
      {form.form === 'limit' && <LimitPart {...part} form={form} />}
      <div className="grid gap-x-4 sm:grid-cols-2">
        <SiteTimeField
          name="startsAt"
          label="From"
          at={now}
          typed={typed?.startsAt}
          zone={zone}
          hint={
            clock ? "By the source's own clock, as its files have it." : 'What was before it stays as it is.'
          }
          errors={errorsOf('startsAt')}
        />
        {ends && (
          <TimeField
            name="endsAt"
            label="Until"
            hint={
              clock
                ? "By the source's own clock: when it was set right, or the last time compared."
                : 'Empty: until the next change that is recorded already, or for good.'
            }
            start={typed?.endsAt ?? ''}
            errors={errorsOf('endsAt')}
          />
        )}
      </div>
      {clock && <ClockPart {...part} />}
      <ReasonField typed={typed} errors={errorsOf('reason')} />
      <Conflict failure={answered} />
      <Button kind="primary" disabled={sending}>
        {sending ? 'Saving' : DATED_TITLES[form.form].button}
      </Button>
    </Form>
  )
}

function ChannelMapPart({ form, typed, errorsOf }: Part & { form: DatedForm & { form: 'channel-map' } }) {
  return (
    <>
      <SuggestField
        name="position"
        label="Position"
        hint="Tag of the position that its readings belong to. Empty: they belong to none."
        start={typed?.position ?? form.position}
        choices={form.choices}
        errors={errorsOf('position')}
      />
      <SelectField
        name="other"
        label="If another channel of this source belongs to that position"
        hint="For two crossed channels, exchange them."
        defaultValue={typed?.other ?? ''}
        options={[
          { value: '', label: 'Ask me' },
          { value: 'exchange', label: 'The two exchange their positions' },
          { value: 'release', label: 'The other one belongs to none' },
        ]}
        errors={errorsOf('other')}
      />
    </>
  )
}

function ClockPart({ typed, errorsOf }: Part) {
  const how = 'Seconds, or minutes and seconds as 2:30. Fast: with a minus.'
  return (
    <>
      <div className="grid gap-x-4 sm:grid-cols-2">
        <TextField
          name="startOffset"
          label="Slow by, at the start"
          hint={how}
          defaultValue={typed?.startOffset ?? '0'}
          errors={errorsOf('startOffset')}
        />
        <TextField
          name="endOffset"
          label="Slow by, at the end"
          hint={how}
          defaultValue={typed?.endOffset ?? ''}
          errors={errorsOf('endOffset')}
        />
      </div>
      <p className="mb-3 text-sm">
        Between the two ends the offset goes straight. The times in the files stay as they are; what is
        recorded here for the same time is replaced, and 0 at both ends takes a correction away. Give as the
        reason what the offsets rest on.
      </p>
    </>
  )
}

function FittingPart({ form, typed, errorsOf }: Part & { form: DatedForm & { form: 'fitting' } }) {
  return (
    <div className="grid gap-x-4 sm:grid-cols-2">
      <SuggestField
        name="serial"
        label="Instrument"
        hint="Serial number of the instrument that sits here. Empty: none does."
        start={typed?.serial ?? form.serial}
        choices={form.choices}
        errors={errorsOf('serial')}
      />
      <TextField
        name="factor"
        label="Factor"
        hint="What the instrument says is multiplied by it. 1 if it needs none."
        inputMode="decimal"
        defaultValue={typed?.factor ?? String(form.factor)}
        errors={errorsOf('factor')}
      />
    </div>
  )
}

function PlacementPart({
  form,
  typed,
  errorsOf,
  segments,
}: Part & { form: DatedForm & { form: 'placement' } }) {
  return (
    <div className="grid gap-x-4 sm:grid-cols-2">
      <SegmentField
        name="segment"
        label="Segment"
        none="None: it stands idle"
        start={typed?.segment ?? form.segment}
        segments={segments}
        errors={errorsOf('segment')}
      />
      <TextField
        name="offsetM"
        label="Metres from the segment’s start"
        inputMode="decimal"
        defaultValue={typed?.offsetM ?? (form.offsetM === null ? '' : String(form.offsetM))}
        errors={errorsOf('offsetM')}
      />
    </div>
  )
}

function LimitPart({ form, typed, errorsOf, segments }: Part & { form: DatedForm & { form: 'limit' } }) {
  return (
    <div className="grid gap-x-4 sm:grid-cols-2">
      <SegmentField
        name="segment"
        label="For"
        none="The whole site"
        start={typed?.segment ?? ''}
        segments={segments}
        errors={errorsOf('segment')}
      />
      <TextField
        name="value"
        label={`Value, ${form.unit}`}
        hint="Such as 2e-7. Empty, for one segment: back to the value of the whole site."
        inputMode="decimal"
        defaultValue={typed?.value ?? (form.value === null ? '' : String(form.value))}
        errors={errorsOf('value')}
      />
    </div>
  )
}
