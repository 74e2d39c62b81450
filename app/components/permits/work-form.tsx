/** The form of a piece of work in the tunnel, to plan it or to change it. */
import { useMemo } from 'react'
import { Form, useNavigation } from 'react-router'
import { PLANNED_WORK_KINDS, PLANNED_WORK_LABELS } from '#app/domain/permit-words.ts'
import { PLACED_WORK } from '#app/domain/planned-work.ts'
import { ChangeWorkSchema, plannedWorkSchema } from '#app/domain/schemas/planned-work.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { WorkPageData, WorkPlaces } from '#app/services/planned-work-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { useCheckedForm } from '../register/use-checked-form.ts'
import { Button } from '../ui/button.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { WorksCrumbs } from './works-page.tsx'

const HOUR_MS = 3_600_000

export function NewWorkPage({ places, failure }: { places: WorkPlaces; failure: ActionFailure | undefined }) {
  return (
    <>
      <PageHead title="Plan work in the tunnel" crumbs={<WorksCrumbs />}>
        Whatever others do there, so that it can be held against what is heated.
      </PageHead>
      <div className="max-w-2xl">
        <Panel title="The work">
          <WorkForm places={places} failure={failure} />
        </Panel>
      </div>
    </>
  )
}

/** @param work given to change it; a new one otherwise */
export function WorkForm({
  places,
  work,
  failure: answered,
}: {
  places: WorkPlaces
  work?: WorkPageData['work']
  failure: ActionFailure | undefined
}) {
  const { zone, now } = useSite()
  const changes = work !== undefined
  const schema = useMemo(
    () => (changes ? plannedWorkSchema(zone).and(ChangeWorkSchema) : plannedWorkSchema(zone)),
    [zone, changes],
  )
  const { failure, errorsOf, onSubmit } = useCheckedForm(schema, answered)
  const sending = useNavigation().formMethod === 'POST'
  const typed = answered?.typed
  const placed = PLACED_WORK.map((kind) => PLANNED_WORK_LABELS[kind].toLowerCase())
  return (
    <Form method="post" noValidate onSubmit={onSubmit}>
      <FormFailure failure={failure} />
      {work !== undefined && (
        <>
          <input type="hidden" name="act" value="change" />
          <input type="hidden" name="revision" value={work.revision} />
        </>
      )}
      <SelectField
        name="kind"
        label="Kind of work"
        defaultValue={typed?.kind ?? work?.kind ?? ''}
        options={[
          { value: '', label: 'Choose' },
          ...PLANNED_WORK_KINDS.map((kind) => ({ value: kind, label: PLANNED_WORK_LABELS[kind] })),
        ]}
        errors={errorsOf('kind')}
      />
      <TextField
        name="title"
        label="What will be done"
        maxLength={200}
        defaultValue={typed?.title ?? work?.title ?? ''}
        errors={errorsOf('title')}
      />
      <SelectField
        name="place"
        label="Where"
        hint={`Always needed for: ${placed.join(', ')}.`}
        defaultValue={typed?.place ?? placeOf(work)}
        options={[
          { value: '', label: 'The site as a whole' },
          ...places.segments.map(({ tag, line, fromM, toM }) => ({
            value: `segment:${tag}`,
            label: `${tag} (${line}, ${fromM} to ${toM} m)`,
          })),
          ...places.lines.map(({ code, name, lengthM }) => ({
            value: `line:${code}`,
            label: `A stretch of ${name} (0 to ${lengthM} m)`,
          })),
        ]}
        errors={errorsOf('place')}
      />
      <div className="grid gap-x-4 sm:grid-cols-2">
        <TextField
          name="fromM"
          label="Stretch from, m"
          hint="Chainage. Empty for the whole segment."
          inputMode="decimal"
          autoComplete="off"
          defaultValue={typed?.fromM ?? work?.fromM ?? ''}
          errors={errorsOf('fromM')}
        />
        <TextField
          name="toM"
          label="to, m"
          inputMode="decimal"
          autoComplete="off"
          defaultValue={typed?.toM ?? work?.toM ?? ''}
          errors={errorsOf('toM')}
        />
        <SiteTimeField
          name="startsAt"
          label="Begins"
          at={work?.startsAt ?? now}
          typed={typed?.startsAt}
          zone={zone}
          errors={errorsOf('startsAt')}
        />
        <SiteTimeField
          name="endsAt"
          label="Ends"
          at={work?.endsAt ?? new Date(now.getTime() + 4 * HOUR_MS)}
          typed={typed?.endsAt}
          zone={zone}
          errors={errorsOf('endsAt')}
        />
      </div>
      <TextField
        name="people"
        label="Who will be there"
        maxLength={500}
        defaultValue={typed?.people ?? work?.people ?? ''}
        errors={errorsOf('people')}
      />
      <TextAreaField
        name="note"
        label="Note"
        rows={2}
        maxLength={1000}
        defaultValue={typed?.note ?? work?.note ?? ''}
        errors={errorsOf('note')}
      />
      {work !== undefined && (
        <TextField
          name="reason"
          label="What has changed, and why"
          maxLength={1000}
          defaultValue={typed?.reason ?? ''}
          errors={errorsOf('reason')}
        />
      )}
      <Button kind={work === undefined ? 'primary' : 'plain'} disabled={sending}>
        {work === undefined ? 'Plan it' : 'Save the change'}
      </Button>
    </Form>
  )
}

function placeOf(work: WorkPageData['work'] | undefined): string {
  if (work === undefined) return ''
  if (work.segmentTag !== null) return `segment:${work.segmentTag}`
  return work.lineCode === null ? '' : `line:${work.lineCode}`
}
