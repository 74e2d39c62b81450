/** One person's account: roles held and once held, giving and taking them, and the end of the account. */
import { useMemo } from 'react'
import { Form, Link, useNavigation } from 'react-router'
import { ROLE_LABELS } from '#app/domain/roles.ts'
import { accountEndSchema, grantSchema } from '#app/domain/schemas/people.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { CompetenceRow } from '#app/services/competences.server.ts'
import type { GrantWithStanding } from '#app/services/people.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { ReasonField, type RegisterFailure } from '../register/thing-form.tsx'
import { useCheckedForm } from '../register/use-checked-form.ts'
import { Button } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { CheckField, SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { fieldTime } from '../ui/site-time.ts'
import { CompetencesPanel } from './competences-panel.tsx'
import { PeopleCrumbs, RoleField } from './people-pages.tsx'

export interface PersonPageProps {
  person: {
    id: number
    name: string
    email: string | null
    note: string
    endsAt: Date | null
    signsIn: boolean
    createdAt: Date
  }
  grants: readonly GrantWithStanding[]
  competences: readonly CompetenceRow[]
  own: boolean
  failure: RegisterFailure | undefined
}

const STANDING: Record<GrantWithStanding['standing'], string> = {
  'in-force': 'in force',
  coming: 'to come',
  waiting: 'waits for a second person',
  ended: 'ended',
}

const COLUMNS: readonly Column<GrantWithStanding>[] = [
  { key: 'role', head: 'Role', rowHead: true, cell: ({ role }) => ROLE_LABELS[role] },
  { key: 'standing', head: 'Now', cell: ({ standing }) => STANDING[standing] },
  { key: 'from', head: 'From', cell: ({ startsAt }) => <Instant at={startsAt} /> },
  { key: 'until', head: 'Until', cell: ({ endsAt }) => (endsAt === null ? 'open' : <Instant at={endsAt} />) },
  {
    key: 'given',
    head: 'Given by',
    cell: ({ grantedBy, grantedAt }) => (
      <>
        {grantedBy ?? 'the set-up'}, <Instant at={grantedAt} />
      </>
    ),
  },
  { key: 'reason', head: 'Reason', cell: ({ reason }) => reason },
  {
    key: 'after',
    head: 'Confirmed or taken away',
    cell: ({ confirmedBy, confirmedAt, revokedBy, revokedAt, revokeReason }) => (
      <>
        {confirmedBy !== null && confirmedAt !== null && (
          <p>
            Confirmed by {confirmedBy}, <Instant at={confirmedAt} />
          </p>
        )}
        {revokedBy !== null && revokedAt !== null && (
          <p>
            Taken away by {revokedBy}, <Instant at={revokedAt} />
            {revokeReason === null ? '' : `: ${revokeReason}`}
          </p>
        )}
      </>
    ),
  },
]

export function PersonPage({ person, grants, competences, own, failure }: PersonPageProps) {
  const failureOf = (intent: string) => (failure?.intent === intent ? failure : undefined)
  const endable = grants.filter(({ standing }) => standing !== 'ended')
  return (
    <>
      <PageHead title={person.name} crumbs={<PeopleCrumbs />}>
        {person.signsIn
          ? `Signs in with ${person.email ?? 'no address'}`
          : 'Only named on records; does not sign in'}
        {person.note !== '' && `. ${person.note}`}.{' '}
        <Link to={`/people/record?person=${person.id}`} className="link">
          What {person.name} did
        </Link>
      </PageHead>
      <Panel title="Roles">
        <DataTable
          caption="Roles by date"
          columns={COLUMNS}
          rows={grants}
          rowKey={({ id }) => id}
          empty="No role has ever been given."
        />
      </Panel>
      {person.signsIn && (
        <div className="grid items-start gap-x-4.5 lg:grid-cols-2">
          <Panel title="Give a role">
            {own && (
              <Notice lead="Your own account. ">
                A role that you give yourself waits until a safety officer, the facility manager or another
                administrator confirms it. That of a safety officer begins a day after.
              </Notice>
            )}
            <GrantForm key={grants.length} failure={failureOf('grant')} />
          </Panel>
          <div>
            {endable.length > 0 && (
              <Panel title="Take a role away">
                <EndGrantForm key={endable.length} grants={endable} failure={failureOf('end-grant')} />
              </Panel>
            )}
            <Panel title="End of the account">
              <AccountEnd
                key={person.endsAt?.getTime() ?? 0}
                endsAt={person.endsAt}
                failure={failureOf('account-end')}
              />
            </Panel>
          </div>
        </div>
      )}
      <CompetencesPanel name={person.name} competences={competences} own={own} failure={failure} />
    </>
  )
}

function useSending(): boolean {
  return useNavigation().formMethod === 'POST'
}

function GrantForm({ failure: answered }: { failure: RegisterFailure | undefined }) {
  const { zone, now } = useSite()
  const schema = useMemo(() => grantSchema(zone), [zone])
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useSending()
  const typed = answered?.typed
  return (
    <Form method="post" noValidate onSubmit={onSubmit}>
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value="grant" />
      <RoleField start={typed?.role ?? ''} errors={errorsOf('role')} />
      <SiteTimeField
        name="startsAt"
        label="From"
        at={now}
        typed={typed?.startsAt}
        zone={zone}
        errors={errorsOf('startsAt')}
      />
      <TextField
        name="until"
        label="Last day"
        hint="Year-month-day, such as 2026-11-30. Empty: open. A contributor always has one."
        defaultValue={typed?.until ?? ''}
        errors={errorsOf('until')}
      />
      <ReasonField typed={typed} errors={errorsOf('reason')} />
      <Button kind="primary" disabled={sending}>
        Give the role
      </Button>
    </Form>
  )
}

function EndGrantForm({
  grants,
  failure,
}: {
  grants: readonly GrantWithStanding[]
  failure: RegisterFailure | undefined
}) {
  const sending = useSending()
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value="end-grant" />
      <SelectField
        name="grantId"
        label="Role"
        defaultValue={failure?.typed?.grantId}
        options={grants.map(({ id, role, standing }) => ({
          value: String(id),
          label: `${ROLE_LABELS[role]}, ${STANDING[standing]}`,
        }))}
        errors={failure?.fields.grantId}
      />
      <ReasonField typed={failure?.typed} errors={failure?.fields.reason} />
      <Button kind="danger" disabled={sending}>
        Take it away now
      </Button>
    </Form>
  )
}

function AccountEnd({
  endsAt,
  failure: answered,
}: {
  endsAt: Date | null
  failure: RegisterFailure | undefined
}) {
  const { zone } = useSite()
  const schema = useMemo(() => accountEndSchema(zone), [zone])
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useSending()
  const typed = answered?.typed
  // The last day that counts is the one before the instant at which the account ends.
  const lastDay = endsAt === null ? '' : fieldTime(new Date(endsAt.getTime() - 1), zone).slice(0, 10)
  return (
    <Form method="post" noValidate onSubmit={onSubmit}>
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value="account-end" />
      <input type="hidden" name="seen" value={endsAt?.toISOString() ?? ''} />
      <TextField
        name="until"
        label="Last day"
        hint="Year-month-day, such as 2026-11-30. Empty: the account is open. What the person wrote stays."
        defaultValue={typed?.until ?? lastDay}
        errors={errorsOf('until')}
      />
      <CheckField
        name="now"
        label="End it at once and sign the person out"
        defaultChecked={typed?.now === 'on'}
        errors={errorsOf('now')}
      />
      <ReasonField typed={typed} errors={errorsOf('reason')} />
      <Button kind="danger" disabled={sending}>
        Save the end
      </Button>
    </Form>
  )
}
