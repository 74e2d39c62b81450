/** What is done with a piece of work: an officer’s ruling, its beginning, its end. */
import { Form, useNavigation } from 'react-router'
import { stretchText } from '#app/domain/permit-conflicts/words.ts'
import { standsInTheWay } from '#app/domain/planned-work.ts'
import type { WorkPageData } from '#app/services/planned-work-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { Panel } from '../ui/panel.tsx'

interface ActProps {
  revision: number
  failure: ActionFailure | undefined
}

function useSending(): boolean {
  return useNavigation().formMethod === 'POST'
}

function PasswordField({ failure }: Pick<ActProps, 'failure'>) {
  return (
    <TextField
      name="password"
      label="Your own password, as your signature"
      type="password"
      autoComplete="current-password"
      required
      errors={failure?.fields.password}
    />
  )
}

export function RulePanels({
  data,
  own,
  failures,
}: {
  data: WorkPageData
  own: boolean
  failures: { limit: ActionFailure | undefined; refuse: ActionFailure | undefined }
}) {
  const { work, asked } = data
  if (own) {
    return (
      <Panel title="An officer’s ruling" className="print:hidden">
        <p className="text-ink-2">You planned this work, so another safety officer has to rule on it.</p>
      </Panel>
    )
  }
  return (
    <>
      {asked !== null && <LimitPanel data={data} asked={asked} failure={failures.limit} />}
      <Panel title="Refuse it" className="print:hidden">
        <details open={failures.refuse !== undefined}>
          <summary className="link inline-block cursor-pointer py-1.5">Refuse the work altogether</summary>
          <RefuseForm revision={work.revision} failure={failures.refuse} />
        </details>
      </Panel>
    </>
  )
}

/** The stretch outside all that is in the way, as a suggestion; the whole of it where nothing is. */
function suggested({ asked, clashes }: WorkPageData): { fromM: number; toM: number } | null {
  if (asked === null) return null
  let { fromM, toM } = asked
  for (const { place } of clashes.filter(standsInTheWay)) {
    if (place === null || place.line !== asked.line) continue
    if (place.fromM - fromM >= toM - place.toM) toM = Math.min(toM, place.fromM)
    else fromM = Math.max(fromM, place.toM)
  }
  return fromM < toM ? { fromM, toM } : null
}

function LimitPanel({
  data,
  asked,
  failure,
}: {
  data: WorkPageData
  asked: { fromM: number; toM: number }
  failure: ActionFailure | undefined
}) {
  const sending = useSending()
  const { typed, fields = {} } = failure ?? {}
  const free = suggested(data)
  const needed = data.clashes.some(standsInTheWay)
  return (
    <Panel title="Limit it" className="print:hidden">
      <details open={needed || failure !== undefined}>
        <summary className="link inline-block cursor-pointer py-1.5">
          Leave only a stretch of it, with a barrier
        </summary>
        <p className="my-2 text-ink-2">
          Asked for is {stretchText(asked)}.
          {needed &&
            (free === null
              ? ' None of it lies outside.'
              : ` Outside all that is in the way lies ${stretchText(free)}.`)}
        </p>
        <Form method="post" className="max-w-xl">
          <FormFailure failure={failure} />
          <input type="hidden" name="act" value="limit" />
          <input type="hidden" name="revision" value={data.work.revision} />
          <div className="grid gap-x-4 sm:grid-cols-2">
            <TextField
              name="fromM"
              label="Only from, m"
              inputMode="decimal"
              autoComplete="off"
              required
              defaultValue={typed?.fromM ?? ''}
              errors={fields.fromM}
            />
            <TextField
              name="toM"
              label="to, m"
              inputMode="decimal"
              autoComplete="off"
              required
              defaultValue={typed?.toM ?? ''}
              errors={fields.toM}
            />
          </div>
          <TextField
            name="barrier"
            label="Barrier"
            hint="What stands where, such as a locked mesh door at 760 m."
            required
            maxLength={500}
            defaultValue={typed?.barrier ?? ''}
            errors={fields.barrier}
          />
          <TextAreaField
            name="ruling"
            label="Ruling in words"
            rows={3}
            required
            minLength={10}
            maxLength={2000}
            defaultValue={typed?.ruling ?? ''}
            errors={fields.ruling}
          />
          <PasswordField failure={failure} />
          <Button kind="primary" disabled={sending}>
            {sending ? 'Signing' : 'Sign the limit'}
          </Button>
        </Form>
      </details>
    </Panel>
  )
}

function RefuseForm({ revision, failure }: ActProps) {
  const sending = useSending()
  return (
    <Form method="post" className="max-w-xl pt-2">
      <FormFailure failure={failure} />
      <input type="hidden" name="act" value="refuse" />
      <input type="hidden" name="revision" value={revision} />
      <TextAreaField
        name="ruling"
        label="Why it cannot be done"
        rows={3}
        required
        minLength={10}
        maxLength={2000}
        defaultValue={failure?.typed?.ruling ?? ''}
        errors={failure?.fields.ruling}
      />
      <PasswordField failure={failure} />
      <Button kind="danger" disabled={sending}>
        Refuse and sign
      </Button>
    </Form>
  )
}

/** @param against how many things keep it from beginning as the page was loaded; the service looks again */
export function BeginPanel({ revision, against, failure }: ActProps & { against: number }) {
  const sending = useSending()
  return (
    <Panel title="Begin" className="print:hidden">
      {against > 0 && (
        <p className="mb-2">
          {against === 1 ? 'One thing keeps' : `${against} things keep`} it from beginning. An officer has to
          rule first, or it has to be changed.
        </p>
      )}
      <Form method="post">
        <FormFailure failure={failure} />
        <input type="hidden" name="act" value="start" />
        <input type="hidden" name="revision" value={revision} />
        <Button kind={against > 0 ? 'plain' : 'primary'} disabled={sending}>
          It begins now
        </Button>
      </Form>
    </Panel>
  )
}

export function FinishPanel({ revision, failure }: ActProps) {
  const sending = useSending()
  return (
    <Panel title="Finish" className="print:hidden">
      <Form method="post">
        <FormFailure failure={failure} />
        <input type="hidden" name="act" value="finish" />
        <input type="hidden" name="revision" value={revision} />
        <TextAreaField
          name="note"
          label="What was left behind, if anything"
          rows={2}
          maxLength={1000}
          defaultValue={failure?.typed?.note ?? ''}
          errors={failure?.fields.note}
        />
        <Button kind="primary" disabled={sending}>
          It is finished, people are out
        </Button>
      </Form>
    </Panel>
  )
}

export function CallOffPanel({ revision, failure }: ActProps) {
  const sending = useSending()
  return (
    <Panel title="Call it off" className="print:hidden">
      <Form method="post">
        <FormFailure failure={failure} />
        <input type="hidden" name="act" value="call-off" />
        <input type="hidden" name="revision" value={revision} />
        <TextField
          name="reason"
          label="Why"
          required
          minLength={5}
          maxLength={1000}
          defaultValue={failure?.typed?.reason ?? ''}
          errors={failure?.fields.reason}
        />
        <Button kind="danger" disabled={sending}>
          Call it off
        </Button>
      </Form>
    </Panel>
  )
}
