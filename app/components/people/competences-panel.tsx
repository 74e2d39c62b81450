/** What a person may do, until when, and who entered it; entering, correcting and taking back. */
import { useMemo } from 'react'
import { Form, useNavigation } from 'react-router'
import { COMPETENCE_KINDS, COMPETENCE_LABELS } from '#app/domain/permit-words.ts'
import { correctedCompetenceSchema, newCompetenceSchema } from '#app/domain/schemas/competence.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { CompetenceRow } from '#app/services/competences.server.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import type { RegisterFailure } from '../register/thing-form.tsx'
import { useCheckedForm } from '../register/use-checked-form.ts'
import { Button } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { fieldTime, spanText } from '../ui/site-time.ts'

/** An end so near is pointed out: a bake and its permit take about as long. */
const SOON_MS = 30 * 86_400_000

/** Until when something holds, with a word for what is over or nearly so. */
export function CompetenceEnd({ endsAt }: { endsAt: Date | null }) {
  const { zone, now } = useSite()
  if (endsAt === null) return <>no end entered</>
  const left = endsAt.getTime() - now.getTime()
  const day = fieldTime(new Date(endsAt.getTime() - 1), zone).slice(0, 10)
  return (
    <>
      <span className="whitespace-nowrap">{day}</span>
      {left <= 0 && <strong className="font-semibold text-bad"> ended</strong>}
      {left > 0 && left <= SOON_MS && (
        <strong className="font-semibold text-warn"> ends in {spanText(left)}</strong>
      )}
    </>
  )
}

const COLUMNS: readonly Column<CompetenceRow>[] = [
  { key: 'kind', head: 'May act as', rowHead: true, cell: ({ kind }) => COMPETENCE_LABELS[kind] },
  { key: 'number', head: 'Number', cell: ({ number }) => number },
  { key: 'from', head: 'From', cell: ({ startsAt }) => <Instant at={startsAt} /> },
  { key: 'until', head: 'Last day', cell: ({ endsAt }) => <CompetenceEnd endsAt={endsAt} /> },
  { key: 'note', head: 'Seen', cell: ({ note }) => note },
  {
    key: 'entered',
    head: 'Entered by',
    cell: ({ enteredBy, enteredAt, replacedAt }) => (
      <>
        {enteredBy}, <Instant at={enteredAt} />
        {replacedAt !== null && (
          <p className="text-ink-3">
            holds no more: corrected or taken back <Instant at={replacedAt} />
          </p>
        )}
      </>
    ),
  },
]

export function CompetencesPanel({
  name,
  competences,
  own,
  failure,
}: {
  name: string
  competences: readonly CompetenceRow[]
  /** Nobody enters their own. */
  own: boolean
  failure: RegisterFailure | undefined
}) {
  const standing = competences.filter(({ replacedAt }) => replacedAt === null)
  return (
    <Panel title="Competences and licences" id="competences">
      <p className="mb-2 text-ink-2">
        Entered from what was shown. Whether {name} can do the work is for those to judge who send them to it.
      </p>
      <DataTable
        caption={`Competences of ${name}`}
        columns={COLUMNS}
        rows={competences}
        rowKey={({ id }) => id}
        rowClass={({ replacedAt }) => (replacedAt === null ? '' : 'text-ink-3 line-through decoration-1')}
        empty="None has been entered."
      />
      {own ? (
        <p className="mt-2 text-ink-2">Your own are entered by somebody else.</p>
      ) : (
        <div className="mt-3 print:hidden">
          <CompetenceForms standing={standing} failure={failure} />
        </div>
      )}
    </Panel>
  )
}

function CompetenceForms({
  standing,
  failure,
}: {
  standing: readonly CompetenceRow[]
  failure: RegisterFailure | undefined
}) {
  const of = (intent: string, replaces?: number) =>
    failure?.intent === intent &&
    (replaces === undefined || failure.typed === undefined || failure.typed.replaces === String(replaces))
      ? failure
      : undefined
  const entering = of('competence-enter')
  return (
    <>
      <details open={entering !== undefined || standing.length === 0} className="mb-2">
        <summary className="link inline-block cursor-pointer py-1">Enter one</summary>
        <CompetenceForm key={standing.length} intent="competence-enter" failure={entering} />
      </details>
      {standing.map((one) => (
        <details
          key={one.id}
          open={
            of('competence-correct', one.id) !== undefined || of('competence-take-back', one.id) !== undefined
          }
          className="mb-2"
        >
          <summary className="link inline-block cursor-pointer py-1">
            Correct “{COMPETENCE_LABELS[one.kind]}”{one.number === '' ? '' : ` ${one.number}`}
          </summary>
          <CompetenceForm intent="competence-correct" row={one} failure={of('competence-correct', one.id)} />
          <TakeBackForm row={one} failure={of('competence-take-back', one.id)} />
        </details>
      ))}
    </>
  )
}

function CompetenceForm({
  intent,
  row,
  failure: answered,
}: {
  intent: 'competence-enter' | 'competence-correct'
  row?: CompetenceRow
  failure: RegisterFailure | undefined
}) {
  const { zone, now } = useSite()
  const schema = useMemo(
    () => (intent === 'competence-enter' ? newCompetenceSchema(zone) : correctedCompetenceSchema(zone)),
    [intent, zone],
  )
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useNavigation().formMethod === 'POST'
  const typed = answered?.typed
  const day = (at: Date) => fieldTime(at, zone).slice(0, 10)
  const lastDay = row?.endsAt == null ? '' : day(new Date(row.endsAt.getTime() - 1))
  return (
    <Form method="post" noValidate onSubmit={onSubmit} className="max-w-xl pt-1">
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value={intent} />
      {row !== undefined && <input type="hidden" name="replaces" value={row.id} />}
      <SelectField
        name="kind"
        label="May act as"
        defaultValue={typed?.kind ?? row?.kind ?? ''}
        options={[
          { value: '', label: 'Choose' },
          ...COMPETENCE_KINDS.map((kind) => ({ value: kind, label: COMPETENCE_LABELS[kind] })),
        ]}
        errors={errorsOf('kind')}
      />
      <TextField
        name="number"
        label="Number"
        hint="Of the licence or certificate. A licence always has one."
        maxLength={40}
        autoComplete="off"
        defaultValue={typed?.number ?? row?.number ?? ''}
        errors={errorsOf('number')}
      />
      <TextField
        name="startsAt"
        label="First day"
        hint="Year-month-day."
        autoComplete="off"
        defaultValue={typed?.startsAt ?? day(row?.startsAt ?? now)}
        errors={errorsOf('startsAt')}
      />
      <TextField
        name="until"
        label="Last day"
        hint="Year-month-day, such as 2027-11-30. Empty: it has no end."
        autoComplete="off"
        defaultValue={typed?.until ?? lastDay}
        errors={errorsOf('until')}
      />
      <TextField
        name="note"
        label={row === undefined ? 'What was shown' : 'What was shown, and what was wrong before'}
        maxLength={500}
        defaultValue={typed?.note ?? row?.note ?? ''}
        errors={errorsOf('note')}
      />
      <Button disabled={sending}>{row === undefined ? 'Enter it' : 'Save the correction'}</Button>
    </Form>
  )
}

function TakeBackForm({ row, failure }: { row: CompetenceRow; failure: RegisterFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Form method="post" className="max-w-xl pt-4">
      <FormFailure failure={failure} />
      <input type="hidden" name="intent" value="competence-take-back" />
      <input type="hidden" name="replaces" value={row.id} />
      <TextAreaField
        name="reason"
        label="Or take it back altogether: why it never held"
        rows={2}
        maxLength={500}
        defaultValue={failure?.typed?.reason ?? ''}
        errors={failure?.fields.reason}
      />
      <Button kind="danger" disabled={sending}>
        Take it back
      </Button>
    </Form>
  )
}
