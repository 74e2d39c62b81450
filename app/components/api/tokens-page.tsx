/** Tokens with which machines send readings: those there are, a new one, and the end of one. */
import { Form, Link, useNavigation } from 'react-router'
import type { TokenStanding, TokensPageData, TokenWithStanding } from '#app/services/api-tokens.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { ReasonField, type RegisterFailure } from '../register/thing-form.tsx'
import { Button } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { CheckField, SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

const STANDING: Record<TokenStanding, string> = { 'in-force': 'in force', ended: 'ended', revoked: 'revoked' }

const COLUMNS: readonly Column<TokenWithStanding>[] = [
  { key: 'name', head: 'For', rowHead: true, cell: ({ name }) => name },
  { key: 'sources', head: 'May send for', cell: ({ sources }) => sources.join(', ') },
  { key: 'standing', head: 'Now', cell: ({ standing }) => STANDING[standing] },
  { key: 'ends', head: 'Until', cell: ({ endsAt }) => <Instant at={endsAt} /> },
  {
    key: 'used',
    head: 'Last used',
    cell: ({ lastUsedAt }) => (lastUsedAt === null ? 'never' : <Instant at={lastUsedAt} age />),
  },
  {
    key: 'made',
    head: 'Made by',
    cell: ({ createdBy, createdAt }) => (
      <>
        {createdBy ?? 'the demo'}, <Instant at={createdAt} />
      </>
    ),
  },
  {
    key: 'revoked',
    head: 'Revoked',
    cell: ({ revokedBy, revokedAt, revokeReason }) =>
      revokedAt === null ? (
        '–'
      ) : (
        <>
          {revokedBy}, <Instant at={revokedAt} />
          {revokeReason === null ? '' : `: ${revokeReason}`}
        </>
      ),
  },
]

export interface TokensPageProps extends TokensPageData {
  failure: (RegisterFailure & { chosen: readonly string[] }) | undefined
  /** The token just made, in the answer to its making and nowhere else. */
  made: { name: string; token: string } | undefined
}

export function TokensPage({ tokens, sources, failure, made }: TokensPageProps) {
  const inForce = tokens.filter(({ standing }) => standing === 'in-force')
  return (
    <>
      <PageHead
        title="Tokens"
        crumbs={
          <Link to="/people" className="link">
            People
          </Link>
        }
      >
        With a token a logger posts its readings to <code>/api/v1/sources/…/readings</code> by itself.
      </PageHead>
      {made !== undefined && (
        <Notice tone="warn" announce="status" lead={`Token for ${made.name}. `}>
          Copy it now into the machine that will use it: it is kept here as a fingerprint only and cannot be
          shown again. Whoever has it can send readings.
          <output className="my-2 block font-mono break-all select-all" aria-label="The new token">
            {made.token}
          </output>
        </Notice>
      )}
      <Panel title="Tokens">
        <DataTable
          caption="Tokens, the newest first"
          columns={COLUMNS}
          rows={tokens}
          rowKey={({ id }) => id}
          empty="No token has been made yet."
        />
      </Panel>
      <div className="grid items-start gap-x-4.5 lg:grid-cols-2">
        <Panel title="Make a token">
          <NewTokenForm
            // Emptied once the token is made.
            key={tokens.length}
            sources={sources}
            failure={failure?.intent === 'add' ? failure : undefined}
          />
        </Panel>
        {inForce.length > 0 && (
          <Panel title="Revoke a token">
            <RevokeForm
              key={inForce.length}
              tokens={inForce}
              failure={failure?.intent === 'revoke' ? failure : undefined}
            />
          </Panel>
        )}
      </div>
    </>
  )
}

function useSending(): boolean {
  return useNavigation().formMethod === 'POST'
}

function NewTokenForm({
  sources,
  failure,
}: {
  sources: TokensPageData['sources']
  failure: TokensPageProps['failure']
}) {
  const sending = useSending()
  const typed = failure?.typed
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value="add" />
      <TextField
        name="name"
        label="What will use it"
        hint="Machine and place, so that it can be told which one to stop."
        required
        minLength={3}
        maxLength={80}
        autoComplete="off"
        defaultValue={typed?.name ?? ''}
        errors={failure?.fields.name}
      />
      <fieldset className="mb-4">
        <legend className="mb-1 font-medium">May send readings of</legend>
        {sources.map(({ code, name }) => (
          <CheckField
            key={code}
            name="sources"
            value={code}
            label={`${code}, ${name}`}
            defaultChecked={failure?.chosen.includes(code) ?? false}
          />
        ))}
        {(failure?.fields.sources ?? []).map((error) => (
          <p key={error} className="text-sm text-bad">
            {error}
          </p>
        ))}
      </fieldset>
      <TextField
        name="until"
        label="Last day"
        type="date"
        hint="It is refused from the day after, two years ahead at most."
        required
        defaultValue={typed?.until ?? ''}
        errors={failure?.fields.until}
      />
      <ReasonField typed={typed} errors={failure?.fields.reason} />
      <Button kind="primary" disabled={sending}>
        Make the token
      </Button>
    </Form>
  )
}

function RevokeForm({
  tokens,
  failure,
}: {
  tokens: readonly TokenWithStanding[]
  failure: TokensPageProps['failure']
}) {
  const sending = useSending()
  return (
    <Form method="post">
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value="revoke" />
      <SelectField
        name="tokenId"
        label="Token"
        defaultValue={failure?.typed?.tokenId}
        options={tokens.map(({ id, name, sources }) => ({
          value: String(id),
          label: `${name} (${sources.join(', ')})`,
        }))}
        errors={failure?.fields.tokenId}
      />
      <ReasonField typed={failure?.typed} errors={failure?.fields.reason} />
      <Button kind="danger" disabled={sending}>
        Revoke it now
      </Button>
    </Form>
  )
}
