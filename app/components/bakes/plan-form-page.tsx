/** The form of a bake plan: a new one, or a new version of one. Works without script. */
import { Form, Link, useNavigation } from 'react-router'
import type { PlanFormData } from '#app/services/bake-plans-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { CheckField, SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

interface FieldLine {
  name: string
  label: string
  hint?: string
}

const HEAT: readonly FieldLine[] = [
  { name: 'celsius', label: 'Bake temperature, °C' },
  { name: 'upKH', label: 'Ramp, °C per hour' },
  { name: 'soakHours', label: 'Soak, hours' },
  {
    name: 'prepHours',
    label: 'Preparation, hours',
    hint: 'Bars, thermocouples, blankets; lies before heating.',
  },
  { name: 'testHours', label: 'Post-bake test, hours' },
]
const LIMITS: readonly FieldLine[] = [
  { name: 'holdPa', label: 'Ramp waits above, Pa', hint: 'Nitrogen-equivalent, at the worst gauge.' },
  { name: 'abortPa', label: 'Heating off above, Pa', hint: 'Leave it empty where nobody has set one.' },
  { name: 'spreadK', label: 'Ramp waits at a spread along the tube of, °C' },
  {
    name: 'fallPercent',
    label: 'Soak ends when pressure falls in 12 h by less than, %',
    hint: 'As well as by its hours: both have to be met.',
  },
]
const COOLING: readonly FieldLine[] = [
  { name: 'downKH', label: 'Rate of held cooling, °C per hour', hint: 'Only where cooling is held.' },
  { name: 'pumpChangeC', label: 'Change from cart to the pump at the cross at, °C' },
  { name: 'coldC', label: 'Cold below, °C', hint: 'Touch limit, measured at the hottest point.' },
  { name: 'targetPa', label: 'Target of the cold segment, Pa', hint: 'Nitrogen-equivalent.' },
]

export function PlanFormPage({
  values,
  segments,
  supplies,
  carts,
  of,
  zone,
  failure,
}: PlanFormData & { failure: ActionFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  const value = (name: string) => (failure?.typed ?? values)[name]
  const errors = (name: string) => failure?.fields[name]
  const lines = (fields: readonly FieldLine[]) =>
    fields.map(({ name, label, hint }) => (
      <TextField
        key={name}
        name={name}
        label={label}
        {...(hint === undefined ? {} : { hint })}
        inputMode="decimal"
        autoComplete="off"
        defaultValue={value(name)}
        errors={errors(name)}
      />
    ))
  const choice = (tags: readonly string[], none: string) => [
    { value: '', label: none },
    ...tags.map((tag) => ({ value: tag, label: tag })),
  ]
  const back = of === null ? '/bakes' : `/bakes/plans/${of.id}`
  return (
    <>
      <PageHead
        title={of === null ? 'New bake plan' : `New version of “${of.title}”`}
        crumbs={
          <>
            <Link to="/bakes" className="link">
              Bakes
            </Link>
            {of !== null && (
              <>
                {' / '}
                <Link to={back} className="link">
                  {of.title}
                </Link>
              </>
            )}
          </>
        }
      >
        {of === null ? 'It becomes a draft with a prediction.' : `Takes the place of version ${of.version}.`}
      </PageHead>
      {of?.state === 'ready' && (
        <Notice tone="warn">
          This plan is signed as ready. A new version makes it a draft again, to be signed anew.
        </Notice>
      )}
      <Form method="post" className="max-w-4xl">
        <FormFailure failure={failure} />
        {(errors('segments') ?? []).map((error) => (
          <p key={error} className="mb-3 text-bad">
            {error}
          </p>
        ))}
        {of !== null && <input type="hidden" name="revision" value={value('revision') ?? of.revision} />}
        <Panel title="What and when">
          <TextField
            name="title"
            label="Name of the plan"
            required
            maxLength={120}
            defaultValue={value('title')}
            errors={errors('title')}
          />
          <div className="grid gap-x-6 sm:grid-cols-2">
            <SelectField
              name="segment"
              label="Segment"
              options={choice(segments, 'Choose')}
              defaultValue={value('segment')}
              errors={errors('segment')}
            />
            <SelectField
              name="second"
              label="In series with"
              options={choice(segments, 'No other segment')}
              defaultValue={value('second')}
              hint="One current through both: they need one diameter."
              errors={errors('second')}
            />
            <TextField
              name="startsAt"
              label="Start of heating"
              autoComplete="off"
              defaultValue={value('startsAt')}
              hint={`Year-month-day hour:minute, site time (${zone}). May stay empty until the bake is scheduled.`}
              errors={errors('startsAt')}
            />
          </div>
        </Panel>
        <Panel title="Heat">
          <div className="grid gap-x-6 sm:grid-cols-2">{lines(HEAT)}</div>
        </Panel>
        <Panel title="When to wait, when to stop">
          <div className="grid gap-x-6 sm:grid-cols-2">{lines(LIMITS)}</div>
          <CheckField
            name="waterBehind"
            label="The soak also waits until water gives less of the reading than hydrogen"
            defaultChecked={value('waterBehind') === 'on'}
            errors={errors('waterBehind')}
          />
        </Panel>
        <Panel title="Cooling and after">
          <div className="grid gap-x-6 sm:grid-cols-2">
            <SelectField
              name="cooling"
              label="Cooling"
              options={[
                { value: 'natural', label: 'By itself, heating off' },
                { value: 'controlled', label: 'Held to a rate' },
              ]}
              defaultValue={value('cooling')}
              errors={errors('cooling')}
            />
            {lines(COOLING)}
          </div>
        </Panel>
        <Panel title="Equipment and remarks">
          <div className="grid gap-x-6 sm:grid-cols-2">
            <SelectField
              name="supply"
              label="Supply set"
              options={[
                { value: '', label: 'None yet' },
                ...supplies.map(({ tag, maxAmps, maxVolts }) => ({
                  value: tag,
                  label: `${tag} (${maxAmps} A, ${maxVolts} V)`,
                })),
              ]}
              defaultValue={value('supply')}
              errors={errors('supply')}
            />
            <SelectField
              name="cart"
              label="Pumping cart"
              options={choice(carts, 'None yet')}
              defaultValue={value('cart')}
              hint="Without one the prediction takes the first cart of the register."
              errors={errors('cart')}
            />
          </div>
          <TextAreaField
            name="remarks"
            label="Remarks"
            rows={3}
            maxLength={2000}
            defaultValue={value('remarks')}
            errors={errors('remarks')}
          />
          {of !== null && (
            <TextAreaField
              name="reason"
              label="Why a new version"
              rows={2}
              required
              minLength={5}
              maxLength={1000}
              defaultValue={value('reason')}
              errors={errors('reason')}
            />
          )}
        </Panel>
        <div className="flex flex-wrap gap-2">
          <Button kind="primary" disabled={sending}>
            {sending ? 'Predicting' : of === null ? 'Save as draft' : 'Save the new version'}
          </Button>
          <ButtonLink to={back}>Leave it</ButtonLink>
        </div>
      </Form>
    </>
  )
}
