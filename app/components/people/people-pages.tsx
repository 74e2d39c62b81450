/** People: who has an account and what for, a new account, and the roles that wait for a second person. */
import { useMemo } from 'react'
import { Form, Link, useNavigation } from 'react-router'
import { ROLE_LABELS, ROLES } from '#app/domain/roles.ts'
import { newPersonSchema } from '#app/domain/schemas/people.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { PersonWithRoles } from '#app/services/people.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import type { RegisterFailure } from '../register/thing-form.tsx'
import { ReasonField } from '../register/thing-form.tsx'
import { useCheckedForm } from '../register/use-checked-form.ts'
import { Button, ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

const COLUMNS: readonly Column<PersonWithRoles>[] = [
  {
    key: 'name',
    head: 'Name',
    rowHead: true,
    cell: ({ id, name }) => (
      <Link to={`/people/${id}`} className="link">
        {name}
      </Link>
    ),
  },
  {
    key: 'roles',
    head: 'Roles now',
    cell: ({ roles }) => roles.map((role) => ROLE_LABELS[role]).join(', ') || 'none',
  },
  {
    key: 'email',
    head: 'Signs in with',
    cell: ({ email, signsIn }) => (signsIn ? (email ?? '') : 'does not sign in'),
  },
  {
    key: 'ends',
    head: 'Account',
    cell: ({ endsAt, ended }) =>
      endsAt === null ? (
        'open'
      ) : (
        <>
          {ended ? 'ended ' : 'ends '}
          <Instant at={endsAt} />
        </>
      ),
  },
  { key: 'note', head: 'Note', cell: ({ note }) => note },
]

export function PeopleCrumbs() {
  return (
    <Link to="/people" className="link">
      People
    </Link>
  )
}

export function PeoplePage({ people, waiting }: { people: readonly PersonWithRoles[]; waiting: number }) {
  return (
    <>
      <PageHead
        title="People"
        actions={
          <>
            <ButtonLink to="/people/competences">Competences</ButtonLink>
            <ButtonLink to="/people/tokens">Tokens</ButtonLink>
            <ButtonLink to="/people/record">Record of who did what</ButtonLink>
            <ButtonLink kind="primary" to="/people/new">
              Make an account
            </ButtonLink>
          </>
        }
      >
        {people.length} people, with the roles that are in force now
      </PageHead>
      {waiting > 0 && (
        <Notice tone="warn" lead="Waiting. ">
          {waiting === 1 ? 'One role waits' : `${waiting} roles wait`} for a second person.{' '}
          <Link to="/people/waiting" className="link">
            Look at {waiting === 1 ? 'it' : 'them'}
          </Link>
        </Notice>
      )}
      <Panel title="Accounts">
        <DataTable
          caption="Accounts"
          columns={COLUMNS}
          rows={people}
          rowKey={({ id }) => id}
          empty="Nobody has an account yet."
        />
      </Panel>
    </>
  )
}

/** Choosing one of the roles. */
export function RoleField({ start, errors }: { start: string; errors: readonly string[] | undefined }) {
  return (
    <SelectField
      name="role"
      label="Role"
      defaultValue={start}
      options={[
        { value: '', label: 'Choose' },
        ...ROLES.map((role) => ({ value: role, label: ROLE_LABELS[role] })),
      ]}
      errors={errors}
    />
  )
}

export function NewPersonPage({ failure: answered }: { failure: RegisterFailure | undefined }) {
  const { zone } = useSite()
  const schema = useMemo(() => newPersonSchema(zone), [zone])
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useNavigation().formMethod === 'POST'
  const typed = answered?.typed
  return (
    <>
      <PageHead title="Make an account" crumbs={<PeopleCrumbs />} />
      <div className="max-w-2xl">
        <Panel title="The new account">
          <Form method="post" noValidate onSubmit={onSubmit}>
            <FormFailure failure={failure} />
            <TextField
              name="name"
              label="First and last name"
              maxLength={120}
              autoComplete="off"
              defaultValue={typed?.name ?? ''}
              errors={errorsOf('name')}
            />
            <TextField
              name="email"
              label="E-mail address"
              type="email"
              hint="The person signs in with it."
              autoComplete="off"
              defaultValue={typed?.email ?? ''}
              errors={errorsOf('email')}
            />
            <TextField
              name="password"
              label="First password"
              type="password"
              hint="At least 12 characters. Tell it to the person yourself; it is not sent or shown anywhere."
              autoComplete="new-password"
              errors={errorsOf('password')}
            />
            <div className="grid gap-x-4 sm:grid-cols-2">
              <RoleField start={typed?.role ?? ''} errors={errorsOf('role')} />
              <TextField
                name="until"
                label="Last day"
                hint="Year-month-day, such as 2026-11-30: the account and its role end with this day. Empty: open. A contributor always has one."
                defaultValue={typed?.until ?? ''}
                errors={errorsOf('until')}
              />
            </div>
            <TextField
              name="note"
              label="Note"
              hint="Such as a firm. Licences are entered on the page of the account."
              maxLength={500}
              defaultValue={typed?.note ?? ''}
              errors={errorsOf('note')}
            />
            <ReasonField typed={typed} errors={errorsOf('reason')} />
            <Button kind="primary" disabled={sending}>
              {sending ? 'Saving' : 'Make the account'}
            </Button>
          </Form>
        </Panel>
      </div>
    </>
  )
}
