/** The stop card: one line and one button, for everybody, on every live permit. */
import { Form, useNavigation } from 'react-router'
import type { StopPageData } from '#app/services/permit-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { TextField } from '../ui/field.tsx'
import { PageHead } from '../ui/panel.tsx'
import { ownFailure } from './act-form.tsx'
import { PermitMark } from './permit-mark.tsx'

export function StopCard({
  number,
  revision,
  failure,
}: {
  number: string
  revision: number
  failure: ActionFailure | undefined
}) {
  const { typed, errors } = ownFailure(failure, 'suspend')
  const sending = useNavigation().formMethod === 'POST'
  return (
    <section
      aria-labelledby="stop-card"
      id="stop"
      className="mb-4.5 rounded-md border-2 border-bad bg-sheet px-4 py-3.5 print:hidden"
    >
      <h2 id="stop-card" className="text-bad">
        Stop card
      </h2>
      <p className="mt-1 mb-3 text-ink-2">
        If something is wrong at the segment: stop, tell the people there, then write it here. Anybody may.
        This records the stop; it does not switch the heating off.
      </p>
      <Form
        method="post"
        action={`/permits/${number}`}
        className="grid items-end gap-x-4 sm:grid-cols-[minmax(0,1fr)_auto]"
      >
        <input type="hidden" name="act" value="suspend" />
        <input type="hidden" name="revision" value={revision} />
        <TextField
          name="reason"
          label="Why work stops"
          required
          minLength={3}
          maxLength={2000}
          defaultValue={typed?.reason}
          errors={errors.reason}
        />
        <Button kind="danger" disabled={sending} className="mb-4 min-h-14 border-2 font-semibold">
          Stop the work
        </Button>
      </Form>
    </section>
  )
}

/** A permit for somebody who may stop work on it and sees nothing else of the facility. */
export function StopPage({
  number,
  segments,
  state,
  revision,
  failure,
}: StopPageData & { failure: ActionFailure | undefined }) {
  return (
    <>
      <PageHead title={`Heated-segment permit ${number}`}>
        {segments.join(' + ')} · <PermitMark state={state} />
      </PageHead>
      <FormFailure failure={failure} />
      {state === 'issued' ? (
        <StopCard number={number} revision={revision} failure={failure} />
      ) : (
        <p>
          There is no work under this permit that could be stopped here. If something is wrong at the segment
          all the same: keep away, and tell a safety officer.
        </p>
      )}
    </>
  )
}
