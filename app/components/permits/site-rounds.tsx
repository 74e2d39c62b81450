/** Rounds at a heated segment on a tablet. */
import { Form, Link, useNavigation } from 'react-router'
import type { SiteRoundsData } from '#app/services/permit-site.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { ChoiceField } from './site-fields.tsx'
import { SiteFrame, SiteSubmit } from './site-frame.tsx'

export interface SiteRoundsProps {
  page: SiteRoundsData
  failure: ActionFailure | undefined
}

export function SiteRounds({ page, failure }: SiteRoundsProps) {
  return (
    <SiteFrame head={page} here="/rounds" title="Rounds">
      {page.may.test && (
        <Panel title="Write a round down">
          <RoundForm page={page} failure={failure} />
        </Panel>
      )}
      <Panel title="Rounds so far">
        {page.rounds.length === 0 && <p className="text-ink-2">None yet.</p>}
        <ul>
          {page.rounds.map((round) => (
            <li key={round.id} className="border-b border-rule-2 py-2">
              <p>
                <Instant at={round.at} /> by {round.personName}:{' '}
                <strong className="font-semibold">{round.inOrder ? 'in order' : 'not in order'}</strong>
                {round.hottestC !== null &&
                  `, hottest ${round.hottestC} °C${round.hottestAtM === null ? '' : ` at ${round.hottestAtM} m`}`}
              </p>
              {round.text !== '' && <p className="whitespace-pre-line">{round.text}</p>}
            </li>
          ))}
        </ul>
      </Panel>
    </SiteFrame>
  )
}

function RoundForm({ page, failure }: SiteRoundsProps) {
  const sending = useNavigation().formMethod === 'POST'
  const { typed, fields } = failure ?? {}
  const most = page.maxCelsius === null ? '' : ` The permit allows ${page.maxCelsius} °C.`
  return (
    <Form method="post" key={page.rounds[0]?.id ?? 0}>
      <FormFailure failure={failure} />
      <TextField
        name="hottestC"
        label="Hottest surface, °C"
        hint={`Measured with a contact probe; shiny steel fools infra-red.${most} Leave it empty if nothing was measured.`}
        inputMode="decimal"
        autoComplete="off"
        defaultValue={typed?.hottestC}
        errors={fields?.hottestC}
      />
      <TextField
        name="hottestAtM"
        label="Where, metres along the tube"
        inputMode="decimal"
        autoComplete="off"
        defaultValue={typed?.hottestAtM}
        errors={fields?.hottestAtM}
      />
      <ChoiceField
        name="inOrder"
        label="Was everything in order?"
        options={[
          { value: 'yes', label: 'In order' },
          { value: 'no', label: 'Not in order' },
        ]}
        chosen={typed?.inOrder}
        errors={fields?.inOrder}
      />
      <TextAreaField
        name="text"
        label="What you saw"
        rows={4}
        maxLength={2000}
        defaultValue={typed?.text}
        errors={fields?.text}
      />
      <SiteTimeField
        name="at"
        label="Walked at"
        at={page.now}
        typed={typed?.at}
        zone={page.zone}
        errors={fields?.at}
      />
      <SiteSubmit sending={sending}>Write the round down</SiteSubmit>
      {page.state === 'issued' && (
        <p className="mt-3">
          If something is wrong:{' '}
          <Link to={`/permits/${page.number}#stop`} className="link inline-flex min-h-14 items-center">
            stop the work
          </Link>
        </p>
      )}
    </Form>
  )
}
