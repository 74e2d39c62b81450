/** Writing a log entry: what happened, when, where, and the writer's signature under it. */
import { zodResolver } from '@hookform/resolvers/zod'
import { useMemo, useState } from 'react'
import { useForm } from 'react-hook-form'
import { Form, Link, useNavigation, useSubmit } from 'react-router'
import type { z } from 'zod'
import { ENTRY_KIND_FACTS, ENTRY_KINDS, type EntryKind } from '#app/domain/logbook.ts'
import { newEntrySchema } from '#app/domain/schemas/logbook.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { CheckField, SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { typedTime } from '../ui/site-time.ts'

type Schema = ReturnType<typeof newEntrySchema>
type Typed = z.input<Schema>

const WHOLE_FACILITY = { value: '', label: 'The facility as a whole' }

export function NewEntryPage({
  segments,
  segment,
  now,
  zone,
  failure,
}: {
  segments: readonly string[]
  segment: string
  now: Date
  zone: string
  failure: ActionFailure | undefined
}) {
  const submit = useSubmit()
  const sending = useNavigation().formMethod === 'POST'
  const schema = useMemo(() => newEntrySchema(zone), [zone])
  // What was typed comes back after a refusal, also where no script kept it.
  const typed = failure?.typed
  const start = {
    segment: typed?.segment ?? segment,
    kind: ENTRY_KINDS.find((each) => each === typed?.kind) ?? 'note',
    eventAt: typed?.eventAt ?? typedTime(now, zone),
    text: typed?.text ?? '',
  }
  const { register, handleSubmit, formState } = useForm<Typed, unknown, z.output<Schema>>({
    resolver: zodResolver(schema),
    mode: 'onTouched',
    defaultValues: { ...start, password: '' },
  })
  const [onChart, setOnChart] = useState(
    typed === undefined ? ENTRY_KIND_FACTS[start.kind].onChart : typed.onChart === 'on',
  )

  // What the form finds here comes first; otherwise what the server found.
  const errorsOf = (name: keyof Typed): readonly string[] | undefined => {
    const own = formState.errors[name]?.message
    return own === undefined ? failure?.fields[name] : [own]
  }
  const kind = register('kind', {
    onChange: (event: { target: { value: EntryKind } }) =>
      setOnChart(ENTRY_KIND_FACTS[event.target.value].onChart),
  })

  return (
    <>
      <PageHead
        title="Write a log entry"
        crumbs={
          <Link to="/logbook" className="link">
            Logbook
          </Link>
        }
      >
        An entry stands as it is signed. It can be amended, and the first text stays readable.
      </PageHead>
      <div className="max-w-2xl">
        <Panel title="Entry">
          <FormFailure failure={failure} />
          <Form
            method="post"
            noValidate={formState.isReady}
            onSubmit={handleSubmit((_values, event) => submit(event?.target as HTMLFormElement))}
          >
            <div className="grid gap-x-4 sm:grid-cols-2">
              <SelectField
                {...register('segment')}
                label="Where"
                defaultValue={start.segment}
                options={[WHOLE_FACILITY, ...segments.map((tag) => ({ value: tag, label: tag }))]}
                errors={errorsOf('segment')}
              />
              <SelectField
                {...kind}
                label="Kind"
                defaultValue={start.kind}
                options={ENTRY_KINDS.map((each) => ({ value: each, label: ENTRY_KIND_FACTS[each].label }))}
                errors={errorsOf('kind')}
              />
            </div>
            <SiteTimeField
              {...register('eventAt')}
              label="When it happened"
              at={now}
              typed={start.eventAt}
              zone={zone}
              errors={errorsOf('eventAt')}
            />
            <TextAreaField
              {...register('text')}
              label="What was done or seen"
              required
              minLength={3}
              maxLength={8000}
              defaultValue={start.text}
              errors={errorsOf('text')}
            />
            <CheckField
              name="onChart"
              label="Mark it on the segment’s chart"
              hint="For what changes the meaning of a curve: a valve, a pump, a gauge."
              checked={onChart}
              onChange={(event) => setOnChart(event.target.checked)}
              errors={errorsOf('onChart')}
            />
            <TextField
              {...register('password')}
              label="Your password, as your signature"
              type="password"
              autoComplete="current-password"
              required
              errors={errorsOf('password')}
            />
            <Button kind="primary" disabled={sending}>
              {sending ? 'Signing' : 'Sign and write'}
            </Button>
          </Form>
        </Panel>
      </div>
    </>
  )
}
