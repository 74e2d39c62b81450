/** What can be done with a plan as a whole: sign it, say how urgent it is, withdraw it. */
import { Form, useNavigation } from 'react-router'
import { PLAN_PRIORITY_LABELS } from '#app/domain/bake-plan.ts'
import { type BakePlanState, PLAN_PRIORITIES, type PlanPriority } from '#app/domain/planning.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { Button } from '../ui/button.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Panel } from '../ui/panel.tsx'

interface ActProps {
  revision: number
  failure: ActionFailure | undefined
}

/** What was typed into this form and what was wrong with it; nothing when another form was refused. */
function own(failure: ActionFailure | undefined, act: string) {
  const mine = failure?.typed?.act === act ? failure : undefined
  return { typed: mine?.typed, fields: mine?.fields ?? {} }
}

function useSending(): boolean {
  return useNavigation().formMethod === 'POST'
}

export function SignPanel({
  revision,
  failure,
  version,
  blocking,
}: ActProps & { version: number; blocking: number }) {
  const { fields } = own(failure, 'sign')
  const sending = useSending()
  return (
    <Panel title="Sign as ready">
      {blocking > 0 ? (
        <p className="mb-2 text-ink-2">
          {blocking} {blocking === 1 ? 'step is' : 'steps are'} missing; signing will be refused until the
          checklist is done.
        </p>
      ) : (
        <p className="mb-2">
          Version {version} becomes the baseline that the bake is held against. A later version takes this
          back.
        </p>
      )}
      <Form method="post">
        <input type="hidden" name="act" value="sign" />
        <input type="hidden" name="revision" value={revision} />
        <TextField
          name="password"
          label="Your own password"
          type="password"
          autoComplete="current-password"
          required
          errors={fields.password}
        />
        <Button kind="primary" disabled={sending}>
          Sign as ready
        </Button>
      </Form>
    </Panel>
  )
}

export function PriorityPanel({ revision, failure, priority }: ActProps & { priority: PlanPriority }) {
  const { typed, fields } = own(failure, 'priority')
  const sending = useSending()
  return (
    <Panel title="Priority">
      <Form method="post">
        <input type="hidden" name="act" value="priority" />
        <input type="hidden" name="revision" value={revision} />
        <SelectField
          name="priority"
          label="Where two bakes want the same thing"
          options={PLAN_PRIORITIES.map((value) => ({ value, label: PLAN_PRIORITY_LABELS[value] }))}
          defaultValue={typed?.priority ?? priority}
          errors={fields.priority}
        />
        <TextField
          name="reason"
          label="Why"
          required
          minLength={5}
          maxLength={1000}
          defaultValue={typed?.reason}
          errors={fields.reason}
        />
        <Button disabled={sending}>Set priority</Button>
      </Form>
    </Panel>
  )
}

export function WithdrawPanel({ revision, failure }: ActProps) {
  const { typed, fields } = own(failure, 'withdraw')
  const sending = useSending()
  return (
    <Panel title="Withdraw">
      <p className="mb-2 text-ink-2">The plan stays readable and can never be taken up again.</p>
      <Form method="post">
        <input type="hidden" name="act" value="withdraw" />
        <input type="hidden" name="revision" value={revision} />
        <TextAreaField
          name="reason"
          label="Why it is withdrawn"
          rows={2}
          required
          minLength={5}
          maxLength={1000}
          defaultValue={typed?.reason}
          errors={fields.reason}
        />
        <Button kind="danger" disabled={sending}>
          Withdraw the plan
        </Button>
      </Form>
    </Panel>
  )
}

/** The bake begins, or is over. The service holds the button to the state of the segments. */
export function MoveOnPanel({ revision, failure, state }: ActProps & { state: BakePlanState }) {
  const { typed, fields } = own(failure, 'move-on')
  const sending = useSending()
  const done = state === 'under-way'
  return (
    <Panel title={done ? 'The bake is over' : 'Heating is on'}>
      <Form method="post">
        <input type="hidden" name="act" value="move-on" />
        <input type="hidden" name="revision" value={revision} />
        <input type="hidden" name="to" value={done ? 'done' : 'under-way'} />
        <TextAreaField
          name="reason"
          label={done ? 'How it ended' : 'What was done'}
          rows={2}
          required
          minLength={5}
          maxLength={1000}
          defaultValue={typed?.reason}
          errors={fields.reason}
        />
        <Button disabled={sending}>{done ? 'Close the plan as done' : 'Record it as under way'}</Button>
      </Form>
    </Panel>
  )
}
