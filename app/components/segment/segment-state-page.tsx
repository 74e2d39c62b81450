/** Setting a segment's state: what it is now, what usually follows, and everything else for what really happened. */
import { Form, Link, useNavigation } from 'react-router'
import {
  isUsualChange,
  SEGMENT_STATE_CODES,
  SEGMENT_STATES,
  type SegmentState,
} from '#app/domain/segment-states.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { CheckField, TextAreaField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { StateMark, StateShape } from '../ui/state-mark.tsx'

export function SegmentStatePage({
  tag,
  state,
  since,
  reason,
  now,
  zone,
  failure,
}: {
  tag: string
  state: SegmentState
  since: Date | null
  reason: string
  now: Date
  zone: string
  failure: ActionFailure | undefined
}) {
  const sending = useNavigation().formMethod === 'POST'
  const others = SEGMENT_STATE_CODES.filter((code) => code !== state)
  const usual = others.filter((code) => isUsualChange(state, code))
  const unusual = others.filter((code) => !isUsualChange(state, code))
  return (
    <>
      <PageHead
        title={`State of ${tag}`}
        crumbs={
          <>
            <Link to="/" className="link">
              Line
            </Link>
            {' / '}
            <Link to={`/segments/${tag}`} className="link">
              {tag}
            </Link>
          </>
        }
      >
        Now: <StateMark state={state} />
        {since !== null && (
          <>
            {' since '}
            <Instant at={since} age />
          </>
        )}
        {reason !== '' && <span className="block text-sm">{reason}</span>}
      </PageHead>
      <div className="max-w-2xl">
        {SEGMENT_STATES[state].hot && (
          <Notice tone="heat" lead="Recorded as hot. ">
            A change of state here cools nothing. Look at the thermometers and at the tube before you set one
            that hides the heat.
          </Notice>
        )}
        <Panel title="New state">
          <FormFailure failure={failure} />
          <Form method="post" className="group">
            <input type="hidden" name="from" value={state} />
            <StateChoice legend="Usually follows" codes={usual} chosen={failure?.typed?.state} />
            <StateChoice
              legend="Out of the usual order"
              codes={unusual}
              chosen={failure?.typed?.state}
              unusual
            />
            {(failure?.fields.state ?? []).map((error) => (
              <p key={error} className="mb-3 text-sm text-bad">
                {error}
              </p>
            ))}
            {/* Shown by the choice itself, so that it needs no script. */}
            <div className="hidden group-has-[[data-unusual]:checked]:block">
              <CheckField
                name="unusual"
                label="This is not the usual way, and it is what happened"
                hint="Say in the reason how it came about."
                defaultChecked={failure?.typed?.unusual === 'on'}
                errors={failure?.fields.unusual}
              />
            </div>
            <SiteTimeField
              name="since"
              label="Since"
              at={now}
              typed={failure?.typed?.since}
              zone={zone}
              errors={failure?.fields.since}
            />
            <TextAreaField
              name="reason"
              label="What was done or seen"
              rows={3}
              required
              minLength={5}
              maxLength={1000}
              defaultValue={failure?.typed?.reason}
              errors={failure?.fields.reason}
            />
            <div className="flex flex-wrap gap-2">
              <Button kind="primary" disabled={sending}>
                {sending ? 'Setting' : 'Set the state'}
              </Button>
              <ButtonLink to={`/segments/${tag}`}>Leave it as it is</ButtonLink>
            </div>
          </Form>
        </Panel>
      </div>
    </>
  )
}

function StateChoice({
  legend,
  codes,
  chosen,
  unusual = false,
}: {
  legend: string
  codes: readonly SegmentState[]
  /** The one that was chosen before the form was refused. */
  chosen: string | undefined
  unusual?: boolean
}) {
  if (codes.length === 0) return null
  return (
    <fieldset className="mb-4">
      <legend className="mb-1 font-medium">{legend}</legend>
      {codes.map((code) => (
        <label
          key={code}
          className="flex min-h-10 cursor-pointer items-center gap-2.5 rounded-sm px-1 py-1 hover:bg-rule-2 pointer-coarse:min-h-11"
        >
          <input
            type="radio"
            name="state"
            value={code}
            defaultChecked={code === chosen}
            required
            data-unusual={unusual ? '' : undefined}
            className="size-5 shrink-0 accent-ink"
          />
          <StateShape state={code} />
          <span>
            <span className="font-medium">{SEGMENT_STATES[code].label}</span>{' '}
            <span className="text-sm text-ink-2">{SEGMENT_STATES[code].meaning}</span>
          </span>
        </label>
      ))}
    </fieldset>
  )
}
