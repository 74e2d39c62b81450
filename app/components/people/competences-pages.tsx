/** Competences of everybody at one look, and the page of one person for those who enter them without seeing accounts. */
import { Link } from 'react-router'
import { COMPETENCE_LABELS } from '#app/domain/permit-words.ts'
import type { CompetenceRow } from '#app/services/competences.server.ts'
import type { RegisterFailure } from '../register/thing-form.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { CompetenceEnd, CompetencesPanel } from './competences-panel.tsx'

function columns(mayEdit: boolean): Column<CompetenceRow>[] {
  return [
    {
      key: 'person',
      head: 'Person',
      rowHead: true,
      cell: ({ personId, personName }) =>
        mayEdit ? (
          <Link to={`/people/${personId}#competences`} className="link">
            {personName}
          </Link>
        ) : (
          personName
        ),
    },
    { key: 'kind', head: 'May act as', cell: ({ kind }) => COMPETENCE_LABELS[kind] },
    { key: 'number', head: 'Number', cell: ({ number }) => number },
    { key: 'until', head: 'Last day', cell: ({ endsAt }) => <CompetenceEnd endsAt={endsAt} /> },
    {
      key: 'entered',
      head: 'Entered by',
      cell: ({ enteredBy, enteredAt }) => (
        <>
          {enteredBy}, <Instant at={enteredAt} />
        </>
      ),
    },
  ]
}

export function CompetencesPage({
  competences,
  without,
  mayEdit,
}: {
  competences: readonly CompetenceRow[]
  /** People for whom none is in force. */
  without: readonly { id: number; name: string }[]
  mayEdit: boolean
}) {
  return (
    <>
      <PageHead title="Competences and licences">
        What has been entered from papers that were shown. Permits are held against the last days.
      </PageHead>
      <Panel title="In force or to come">
        <DataTable
          caption="Competences by person"
          columns={columns(mayEdit)}
          rows={competences}
          rowKey={({ id }) => id}
          empty="None has been entered yet. A safety officer or the administrator does so on a person’s page."
        />
      </Panel>
      {without.length > 0 && (
        <Panel title="None in force">
          <ul className="columns-1 gap-8 sm:columns-2 lg:columns-3">
            {without.map(({ id, name }) => (
              <li key={id} className="py-1">
                {mayEdit ? (
                  <Link to={`/people/${id}#competences`} className="link">
                    {name}
                  </Link>
                ) : (
                  name
                )}
              </li>
            ))}
          </ul>
        </Panel>
      )}
    </>
  )
}

export function CompetencePersonPage({
  person,
  competences,
  own,
  failure,
}: {
  person: { id: number; name: string; note: string }
  competences: readonly CompetenceRow[]
  own: boolean
  failure: RegisterFailure | undefined
}) {
  return (
    <>
      <PageHead
        title={person.name}
        crumbs={
          <Link to="/people/competences" className="link">
            Competences
          </Link>
        }
      >
        {person.note}
      </PageHead>
      <CompetencesPanel name={person.name} competences={competences} own={own} failure={failure} />
    </>
  )
}
