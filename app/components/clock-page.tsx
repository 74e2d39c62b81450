/** Moving the demo's clock forward: what was due meanwhile becomes due, as it would have by waiting. */
import { Form } from 'react-router'
import type { ActionFailure } from './forms/failure.ts'
import { FormFailure } from './forms/form-failure.tsx'
import { SiteTimeField } from './forms/site-time-field.tsx'
import { Button } from './ui/button.tsx'
import { TextField } from './ui/field.tsx'
import { Notice } from './ui/notice.tsx'
import { PageHead, Panel } from './ui/panel.tsx'
import { longTimeText, offsetLabel } from './ui/site-time.ts'

const HOUR_MS = 3_600_000

export function ClockPage({
  demo,
  now,
  zone,
  failure,
}: {
  demo: boolean
  now: Date
  zone: string
  failure: ActionFailure | undefined
}) {
  const present = `${longTimeText(now, zone)} (${offsetLabel(now, zone)})`
  if (!demo) {
    return (
      <>
        <PageHead title="Clock">{present}</PageHead>
        <Notice lead="">This is a real site: it runs on real time, and nobody moves its clock.</Notice>
      </>
    )
  }
  return (
    <>
      <PageHead title="Demo clock">It stands at {present} and runs on while the product runs.</PageHead>
      <div className="max-w-xl">
        <Panel title="Move it forward">
          <FormFailure failure={failure} />
          <Form method="post">
            <SiteTimeField
              name="to"
              label="New site time"
              at={new Date(now.getTime() + HOUR_MS)}
              typed={failure?.typed?.to}
              zone={zone}
              hint="Only forward: what has been written keeps its time, and a clock put back would lie about it."
              errors={failure?.fields.to}
            />
            <TextField
              name="reason"
              label="What do you want to watch?"
              required
              maxLength={500}
              defaultValue={failure?.typed?.reason}
              hint="It stands in the record beside the move."
              errors={failure?.fields.reason}
            />
            <Button kind="primary">Move the clock</Button>
          </Form>
        </Panel>
      </div>
    </>
  )
}
