/** Where a permit begins: from a bake plan that may be asked for, or from a segment by hand. */
import { Form, Link, useNavigation } from 'react-router'
import type { NewPermitData } from '#app/services/permit-prefill.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

type PlanChoice = NewPermitData['plans'][number]

export function NewPermitPage(props: NewPermitData & { failure: ActionFailure | undefined }) {
  const { plans, asked, failure } = props
  const ready = plans.filter(({ links }) => links.length > 0)
  const refused = plans.filter(({ links }) => links.length === 0)
  const askedFor = refused.find(({ id }) => id === asked)
  return (
    <>
      <PageHead
        title="New permit"
        crumbs={
          <Link to="/permits" className="link">
            Permits
          </Link>
        }
      >
        It begins as a draft: places, limits, isolation points and tests are proposed, people and hazards are
        left to you.
      </PageHead>
      <div className="max-w-4xl">
        <FormFailure failure={failure} />
        {askedFor !== undefined && (
          <Notice tone="warn" lead={`No permit can be asked for “${askedFor.title}” as it stands. `}>
            What stands in the way is listed below.
          </Notice>
        )}
        {asked !== null && !plans.some(({ id }) => id === asked) && (
          <Notice tone="warn">there is no open bake plan {asked}.</Notice>
        )}
        <FromPlan plans={ready} asked={asked} failure={failure} />
        <FromSegment {...props} />
        {refused.length > 0 && (
          <Panel title="Plans for which no permit can be asked yet">
            <ul>
              {[...refused]
                .sort((a, b) => Number(b.id === asked) - Number(a.id === asked))
                .map((plan) => (
                  <li key={plan.id} className="border-t py-3 first:border-t-0 first:pt-0">
                    <PlanName plan={plan} />
                    <WhyNot plan={plan} open={plan.id === asked} />
                  </li>
                ))}
            </ul>
          </Panel>
        )}
      </div>
    </>
  )
}

function PlanName({ plan: { id, title, segments, state, createdBy, permits } }: { plan: PlanChoice }) {
  return (
    <>
      <p>
        <Link to={`/bakes/plans/${id}`} className="link font-medium">
          {title}
        </Link>{' '}
        <span className="text-ink-2">
          {segments.join(' + ')} · {state} · planned by {createdBy}
        </span>
      </p>
      {permits.map((permit) => (
        <p key={permit.number} className="text-sm text-ink-2">
          Already made from it:{' '}
          <Link to={`/permits/${permit.number}`} className="link">
            {permit.number}
          </Link>
          {permit.title === '' ? '' : `, ${permit.title}`}
        </p>
      ))}
    </>
  )
}

function WhyNot({ plan: { refusal }, open }: { plan: PlanChoice; open: boolean }) {
  if (refusal === null) return null
  if (refusal.missing.length === 0) return <p className="mt-1">{refusal.message}</p>
  return (
    <details className="mt-1" open={open}>
      <summary className="min-h-8 py-1">{refusal.message}</summary>
      <ul className="mt-1 list-disc pl-5 text-ink-2">
        {refusal.missing.map((step) => (
          <li key={step}>{step}</li>
        ))}
      </ul>
    </details>
  )
}

function FromPlan({
  plans,
  asked,
  failure,
}: {
  plans: readonly PlanChoice[]
  asked: number | null
  failure: ActionFailure | undefined
}) {
  const sending = useNavigation().formMethod === 'POST'
  const chosen = failure?.typed?.link
  return (
    <Panel title="From a bake plan">
      {plans.length === 0 ? (
        <p className="text-ink-2">No plan is signed as ready with every step done.</p>
      ) : (
        <Form method="post">
          <input type="hidden" name="from" value="plan" />
          {plans.map((plan) => (
            <fieldset
              key={plan.id}
              className="mb-3 min-w-0 border-t pt-3 first-of-type:border-t-0 first-of-type:pt-0"
            >
              <legend className="sr-only">{plan.title}</legend>
              <PlanName plan={plan} />
              {plan.links.map(({ number, text }) => {
                const value = `${plan.id}:${number}`
                return (
                  <label
                    key={value}
                    htmlFor={`link-${value}`}
                    className="flex min-h-10 items-center gap-2.5 pointer-coarse:min-h-11"
                  >
                    <input
                      id={`link-${value}`}
                      type="radio"
                      name="link"
                      value={value}
                      required
                      defaultChecked={
                        chosen === undefined ? plan.id === asked && number === 1 : chosen === value
                      }
                      className="size-5 shrink-0 accent-ink"
                    />
                    <span className="min-w-0">{text}</span>
                  </label>
                )
              })}
            </fieldset>
          ))}
          {(failure?.fields.link ?? []).map((error) => (
            <p key={error} className="mb-3 text-sm text-bad">
              {error}
            </p>
          ))}
          <Button kind="primary" disabled={sending}>
            Draw up the draft
          </Button>
        </Form>
      )}
    </Panel>
  )
}

function FromSegment({
  segments,
  supplies,
  failure,
}: NewPermitData & { failure: ActionFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  const typed = failure?.typed
  const errors = (name: string) => failure?.fields[name]
  const tags = (none: string) => [
    { value: '', label: none },
    ...segments.map((tag) => ({ value: tag, label: tag })),
  ]
  return (
    <Panel title="From a segment, by hand">
      <p className="mb-3 text-ink-2">
        For blankets, trials of a supply set and other heat without a bake plan.
      </p>
      <Form method="post">
        <input type="hidden" name="from" value="segment" />
        <div className="grid gap-x-6 sm:grid-cols-2">
          <SelectField
            name="segment"
            label="Segment"
            required
            options={tags('Choose')}
            defaultValue={typed?.segment ?? ''}
            errors={[...(errors('segment') ?? []), ...(errors('segments') ?? [])]}
          />
          <SelectField
            name="second"
            label="In series with"
            options={tags('No other segment')}
            defaultValue={typed?.second ?? ''}
            errors={errors('second')}
          />
          <TextField
            name="celsius"
            label="Highest temperature, °C"
            inputMode="decimal"
            autoComplete="off"
            hint="May stay empty until it is settled."
            defaultValue={typed?.celsius ?? ''}
            errors={errors('celsius')}
          />
          <SelectField
            name="supply"
            label="Supply set"
            options={[
              { value: '', label: 'None: blankets only' },
              ...supplies.map(({ tag, maxAmps, maxVolts }) => ({
                value: tag,
                label: `${tag} (${maxAmps} A, ${maxVolts} V)`,
              })),
            ]}
            hint="With a temperature as well, current and voltage at the end of the ramp are worked out."
            defaultValue={typed?.supply ?? ''}
            errors={errors('supply')}
          />
        </div>
        <Button disabled={sending}>Draw up the draft</Button>
      </Form>
    </Panel>
  )
}
