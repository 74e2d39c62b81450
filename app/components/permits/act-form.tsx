/** The form of one act on a permit: what it does, what stands in its way, what it asks for, and the signature. */
import { Form, Link, useNavigation } from 'react-router'
import type { OfferedAct } from '#app/domain/permit-offers.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { ActOffer } from '#app/services/permit-page.server.ts'
import type { ActionFailure, Typed } from '../forms/failure.ts'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { CheckField, SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Panel } from '../ui/panel.tsx'
import { ACT_WORDS, kindOf } from './act-words.ts'

interface Fields {
  typed: Typed | undefined
  errors: Readonly<Record<string, readonly string[]>>
}

/** What was typed into this form and what was wrong with it; nothing when another form was refused. */
export function ownFailure(failure: ActionFailure | undefined, act: string): Fields {
  const mine = failure?.typed?.act === act ? failure : undefined
  return { typed: mine?.typed, errors: mine?.fields ?? {} }
}

/**
 * @param here address of the permit's page, to leave the form without doing anything
 * @param people who may have held it until now, for a hand-over
 */
export function ActForm({
  offer,
  revision,
  failure,
  here,
  holder,
}: {
  offer: ActOffer
  revision: number
  failure: ActionFailure | undefined
  here: string
  holder: { id: number; name: string } | null
}) {
  const { act, reasons, signed, reasonAsked } = offer
  const words = ACT_WORDS[act]
  const fields = ownFailure(failure, act)
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Panel title={words.button} id="act" className="scroll-mt-4 border-ink print:hidden">
      <p className="mb-3">{words.does}</p>
      {reasons.length > 0 && (
        <div className="mb-4 border-l-4 border-warn bg-warn-soft px-3 py-2">
          <p className="font-semibold">As things stand this will be refused:</p>
          <ul className="ml-5 list-disc">
            {reasons.map((reason) => (
              <li key={reason}>{reason}</li>
            ))}
          </ul>
        </div>
      )}
      {/* Without the query, so that a refused form comes back at the permit's own address. */}
      <Form method="post" action={`${here}?act=${act}`} className="max-w-[46rem]" preventScrollReset>
        <input type="hidden" name="act" value={act} />
        <input type="hidden" name="revision" value={revision} />
        {reasonAsked && <ReasonField label={words.reason} {...fields} />}
        <ActFields act={act} holder={holder} {...fields} />
        {signed && (
          <TextField
            name="password"
            label="Your own password, as your signature"
            type="password"
            autoComplete="current-password"
            required
            errors={fields.errors.password}
          />
        )}
        <div className="flex flex-wrap items-center gap-4">
          <Button kind={kindOf(act, reasons)} disabled={sending}>
            {signed ? `Sign: ${words.button.toLowerCase()}` : words.button}
          </Button>
          <Link to={here} className="link py-1" preventScrollReset>
            Leave it
          </Link>
        </div>
      </Form>
    </Panel>
  )
}

function ReasonField({ label, typed, errors }: Fields & { label: string }) {
  return (
    <TextAreaField
      name="reason"
      label={label}
      rows={3}
      required
      minLength={3}
      maxLength={2000}
      defaultValue={typed?.reason}
      errors={errors.reason}
    />
  )
}

/** What an act asks for besides reason and signature. */
function ActFields({
  act,
  holder,
  ...fields
}: Fields & { act: OfferedAct; holder: { id: number; name: string } | null }) {
  const { typed, errors } = fields
  switch (act) {
    case 'approve':
      return (
        <TextAreaField
          name="terms"
          label="Terms that you add, if any"
          rows={2}
          maxLength={2000}
          defaultValue={typed?.terms}
          errors={errors.terms}
        />
      )
    case 'accept':
    case 'revalidate':
      return (
        <Confirm
          name="onSite"
          label="I am at the segment, and this is the place I have looked at"
          {...fields}
        />
      )
    case 'hand-over':
      return <HandOverFields holder={holder} {...fields} />
    case 'extend':
      return <ExtendFields {...fields} />
    case 'made-safe':
      return <MadeSafeFields {...fields} />
    case 'hand-back':
      return <HandBackFields {...fields} />
    case 'cancel':
      return <CancelFields {...fields} />
    default:
      return null
  }
}

function Confirm({ name, label, typed, errors }: Fields & { name: string; label: string }) {
  return (
    <CheckField
      name={name}
      value="yes"
      label={label}
      defaultChecked={typed?.[name] === 'yes'}
      errors={errors[name]}
    />
  )
}

function HandOverFields({ holder, ...fields }: Fields & { holder: { id: number; name: string } | null }) {
  const { typed, errors } = fields
  return (
    <>
      <p className="mb-3">
        You take it over from <strong>{holder?.name ?? 'nobody: it has no holder'}</strong>.
      </p>
      <input type="hidden" name="outgoingId" value={holder?.id ?? ''} />
      {errors.outgoingId?.map((error) => (
        <p key={error} className="mb-3 text-sm text-bad">
          {error}
        </p>
      ))}
      <SelectField
        name="how"
        label="Where the two of you are"
        options={[
          { value: '', label: 'Choose' },
          { value: 'at-site', label: 'Together at the segment' },
          { value: 'by-phone', label: 'On the telephone' },
        ]}
        defaultValue={typed?.how ?? ''}
        errors={errors.how}
      />
      <Confirm
        name="readBack"
        label="By telephone: I have read the state of the work back, word for word"
        {...fields}
      />
    </>
  )
}

function ExtendFields({ typed, errors }: Fields) {
  return (
    <>
      <TextField
        name="hours"
        label="Hours that are added"
        inputMode="decimal"
        required
        defaultValue={typed?.hours}
        errors={errors.hours}
      />
      <TextAreaField
        name="recheck"
        label="What was checked again for the longer window"
        rows={2}
        required
        maxLength={2000}
        defaultValue={typed?.recheck}
        errors={errors.recheck}
      />
    </>
  )
}

function MadeSafeFields({ typed, errors }: Fields) {
  const { now, zone } = useSite()
  return (
    <>
      <TextField
        name="who"
        label="Who made it safe"
        required
        maxLength={120}
        defaultValue={typed?.who}
        errors={errors.who}
      />
      <SiteTimeField name="at" label="When" at={now} typed={typed?.at} zone={zone} errors={errors.at} />
      <TextAreaField
        name="how"
        label="How"
        rows={2}
        required
        maxLength={2000}
        defaultValue={typed?.how}
        errors={errors.how}
      />
    </>
  )
}

function HandBackFields(fields: Fields) {
  const { typed, errors } = fields
  return (
    <>
      <SelectField
        name="outcome"
        label="The work"
        options={[
          { value: '', label: 'Choose' },
          { value: 'complete', label: 'is complete' },
          { value: 'stopped', label: 'was stopped before it was complete' },
        ]}
        defaultValue={typed?.outcome ?? ''}
        errors={errors.outcome}
      />
      <TextAreaField
        name="plantState"
        label="State in which the plant is left"
        rows={2}
        required
        maxLength={2000}
        defaultValue={typed?.plantState}
        errors={errors.plantState}
      />
      <TextField
        name="hottestC"
        label="Hottest surface, measured with a contact probe, °C"
        inputMode="decimal"
        required
        defaultValue={typed?.hottestC}
        errors={errors.hottestC}
      />
      <Confirm name="peopleClear" label="Everybody is clear" {...fields} />
      <Confirm name="toolsOut" label="Tools and materials are out" {...fields} />
      <SelectField
        name="locks"
        label="Locks"
        options={[
          { value: '', label: 'Choose' },
          { value: 'removed', label: 'All are off' },
          { value: 'left', label: 'Some are left on' },
        ]}
        defaultValue={typed?.locks ?? ''}
        errors={errors.locks}
      />
      <TextField
        name="locksText"
        label="If some are left: which, and why"
        maxLength={2000}
        defaultValue={typed?.locksText}
        errors={errors.locksText}
      />
    </>
  )
}

function CancelFields({ typed, errors }: Fields) {
  return (
    <>
      <TextAreaField
        name="inspection"
        label="What you found at the segment"
        rows={3}
        required
        maxLength={2000}
        defaultValue={typed?.inspection}
        errors={errors.inspection}
      />
      <TextAreaField
        name="lessons"
        label="What is to be learned from it, if anything"
        rows={2}
        maxLength={2000}
        defaultValue={typed?.lessons}
        errors={errors.lessons}
      />
    </>
  )
}
