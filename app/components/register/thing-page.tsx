/** The page of one thing of the register, and the page that adds one. */
import { Link } from 'react-router'
import { type EditedKind, isEditedKind, KIND_FACTS } from '#app/domain/schemas/register.ts'
import type { FieldFact } from '#app/domain/schemas/register-fields.ts'
import type { FieldValue } from '#app/domain/schemas/register-values.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { CrossedFindings } from '#app/services/crossed-suggestions.server.ts'
import type { RegisterDetail } from '#app/services/register-page.server.ts'
import type { ProfilePart } from '#app/services/source-profile.server.ts'
import type { Typed } from '../forms/failure.ts'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { dayText } from '../ui/site-time.ts'
import { CellView } from './cell-view.tsx'
import { CrossedPanel } from './crossed-panel.tsx'
import { DATED_TITLES, DatedRowForm } from './dated-forms.tsx'
import { PROFILE_INTENT, ProfileForm } from './profile-form.tsx'
import { RegisterCrumbs, withArticle } from './register-pages.tsx'
import { HistoryTable, RegisterTableView } from './register-table.tsx'
import { type RegisterFailure, ThingForm } from './thing-form.tsx'

export function ThingPage({
  kind,
  tag,
  values,
  revision,
  facts,
  tables,
  form,
  segments,
  history,
  mayEdit,
  failure,
  crossed,
  suggested,
  profile,
}: RegisterDetail & {
  mayEdit: boolean
  failure: RegisterFailure | undefined
  crossed: CrossedFindings | null
  suggested: Typed | undefined
  /** How a source's files are read; null for other kinds. */
  profile: ProfilePart | null
}) {
  const kindFacts = KIND_FACTS[kind]
  return (
    <>
      <PageHead title={tag} crumbs={<RegisterCrumbs kind={kind} />}>
        {kind === 'segments' ? (
          <>
            Segment.{' '}
            <Link to={`/segments/${encodeURIComponent(tag)}`} className="link">
              Its readings and forecast
            </Link>
          </>
        ) : (
          kindFacts.one.charAt(0).toUpperCase() + kindFacts.one.slice(1)
        )}
      </PageHead>
      {kind === 'limits' && !mayEdit && (
        <Notice lead="Read only. ">A vacuum engineer sets limits and targets; ask one for a change.</Notice>
      )}
      {(facts.length > 0 || values !== null) && (
        <Panel title="Recorded now">
          <div className="max-w-2xl">
            <Facts
              items={[
                ...facts.map(({ name, cell }) => ({ name, value: <CellView cell={cell} /> })),
                ...(values === null
                  ? []
                  : kindFacts.fields.map((field) => ({
                      name: field.label,
                      value: <FieldView field={field} value={values[field.name] ?? null} />,
                    }))),
              ]}
            />
          </div>
        </Panel>
      )}
      {crossed !== null && <CrossedPanel findings={crossed} mayEdit={mayEdit} />}
      {mayEdit && form !== null && (
        <Folded
          id="change"
          title={DATED_TITLES[form.form].title}
          open={failure?.intent === form.form || suggested !== undefined}
        >
          <DatedRowForm
            // Another suggestion is another form: its fields start anew.
            key={`${form.seen} ${suggested?.position ?? ''} ${suggested?.startsAt ?? ''}`}
            form={form}
            segments={segments}
            failure={failure?.intent === form.form ? failure : undefined}
            suggested={suggested}
          />
        </Folded>
      )}
      {mayEdit && profile !== null && (
        <Folded title="Change how its files are read" open={failure?.intent === PROFILE_INTENT}>
          <ProfileForm
            key={profile.version}
            profile={profile}
            failure={failure?.intent === PROFILE_INTENT ? failure : undefined}
          />
        </Folded>
      )}
      {mayEdit && values !== null && isEditedKind(kind) && (
        <Folded title={`Change what is recorded of this ${kindFacts.one}`} open={failure?.intent === 'edit'}>
          <ThingForm
            key={revision}
            kind={kind}
            values={values}
            revision={revision}
            segments={segments}
            failure={failure?.intent === 'edit' ? failure : undefined}
          />
        </Folded>
      )}
      {tables.map((table) => (
        <Panel key={table.title} title={table.title}>
          <RegisterTableView table={table} />
        </Panel>
      ))}
      <Panel title="History">
        <HistoryTable history={history} />
      </Panel>
    </>
  )
}

/** A form that stays folded until it is wanted, so that looking something up is not looking past a form. */
function Folded({
  id,
  title,
  open,
  children,
}: {
  id?: string
  title: string
  open: boolean
  children: React.ReactNode
}) {
  return (
    <details id={id} open={open} className="mb-4.5 rounded-md border bg-sheet px-4 py-2 print:hidden">
      <summary className="min-h-8 cursor-pointer py-1 font-semibold">{title}</summary>
      <div className="max-w-3xl pt-3 pb-2">{children}</div>
    </details>
  )
}

function FieldView({ field, value }: { field: FieldFact; value: FieldValue }) {
  const { zone } = useSite()
  if (value === null || value === '') return <CellView cell={{ kind: 'none' }} />
  if (typeof value === 'boolean') return value ? 'yes' : 'no'
  if (typeof value === 'number') return <CellView cell={{ kind: 'number', value, unit: field.unit }} />
  // The last day that counts is the one before the instant at which it no longer does.
  if (value instanceof Date && field.input === 'last-day') return dayText(new Date(value.getTime() - 1), zone)
  if (value instanceof Date) return <CellView cell={{ kind: 'instant', at: value }} />
  if (field.input === 'segment') {
    return (
      <CellView cell={{ kind: 'link', to: `/register/segments/${encodeURIComponent(value)}`, text: value }} />
    )
  }
  return field.options.find((option) => option.value === value)?.label ?? value
}

export function NewThingPage({
  kind,
  segments,
  failure,
}: {
  kind: EditedKind
  segments: readonly string[]
  failure: RegisterFailure | undefined
}) {
  const { one } = KIND_FACTS[kind]
  return (
    <>
      <PageHead title={`Add ${withArticle(one)}`} crumbs={<RegisterCrumbs kind={kind} />} />
      <div className="max-w-3xl">
        <Panel title={`The new ${one}`}>
          <ThingForm kind={kind} revision={0} segments={segments} failure={failure} />
        </Panel>
      </div>
    </>
  )
}
