/** Roles that people gave themselves: another person confirms or refuses each. */
import { Form, useNavigation } from 'react-router'
import { hoursAfterConfirmation, ROLE_LABELS, type Role } from '#app/domain/roles.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { ReasonField, type RegisterFailure } from '../register/thing-form.tsx'
import { Button } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

interface WaitingGrant {
  id: number
  person: string
  role: Role
  startsAt: Date
  endsAt: Date | null
  grantedAt: Date
  reason: string
  /** The reader is the person concerned and cannot decide. */
  own: boolean
}

export function WaitingPage({
  grants,
  failure,
}: {
  grants: readonly WaitingGrant[]
  failure: RegisterFailure | undefined
}) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <>
      <PageHead title="Roles that wait">
        Nobody gains a role by their own hand. A role that somebody gave to themselves holds once another
        person has confirmed it.
      </PageHead>
      {failure !== undefined && !grants.some(({ id }) => String(id) === failure.typed?.grantId) && (
        <FormFailure failure={failure} />
      )}
      {grants.length === 0 && <p className="py-2 text-ink-2">Nothing waits.</p>}
      {grants.map((grant) => {
        const own = failure?.typed?.grantId === String(grant.id) ? failure : undefined
        return (
          <Panel key={grant.id} title={`${grant.person}: ${ROLE_LABELS[grant.role]}`}>
            <p className="mb-2">
              Asked for <Instant at={grant.grantedAt} age />, to hold from <Instant at={grant.startsAt} />
              {grant.endsAt !== null && (
                <>
                  {' '}
                  until <Instant at={grant.endsAt} />
                </>
              )}
              . Reason: {grant.reason}
            </p>
            {hoursAfterConfirmation(grant.role) > 0 && (
              <p className="mb-2">
                Whoever holds this role approves what others plan: once confirmed it begins{' '}
                {hoursAfterConfirmation(grant.role)} hours later.
              </p>
            )}
            {grant.own ? (
              <p className="text-ink-2">You asked for this yourself; another person decides.</p>
            ) : (
              <Form method="post" className="max-w-2xl">
                <FormFailure failure={own} />
                <input type="hidden" name="grantId" value={grant.id} />
                <ReasonField typed={own?.typed} errors={own?.fields.reason} />
                <div className="flex flex-wrap gap-2">
                  <Button kind="primary" name="decision" value="confirm" disabled={sending}>
                    Confirm the role
                  </Button>
                  <Button kind="danger" name="decision" value="refuse" disabled={sending}>
                    Refuse it
                  </Button>
                </div>
              </Form>
            )}
          </Panel>
        )
      })}
    </>
  )
}
