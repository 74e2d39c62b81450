/** Closed bays: what is closed and why, the readings since, a reading to type, and the officer's release. */
import { Form, Link, useNavigation } from 'react-router'
import type { BaysPageData, ClosedBay } from '#app/services/bays.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

export interface BaysPageProps extends BaysPageData {
  mayType: boolean
  mayRelease: boolean
  /** The segment that the reader comes from; empty for none. */
  asked: string
  now: Date
  zone: string
  failure: ActionFailure | undefined
}

export function BaysPage(props: BaysPageProps) {
  const { open, released, limits, mayType } = props
  return (
    <>
      <PageHead
        title="Closed bays and oxygen"
        crumbs={
          <Link to="/permits" className="link">
            Permits
          </Link>
        }
      >
        A reading below {limits.low.toFixed(1)} % or above {limits.high.toFixed(1)} % closes the segment’s
        stretch at once. Ebbline writes down and shows; it locks no door and measures nothing itself.
      </PageHead>
      {!limits.set && (
        <Notice tone="warn" lead="Not set by site. ">
          The limits above are published figures; nobody here has adopted them. An officer does that under{' '}
          <Link to="/permits/thresholds" className="link">
            Thresholds
          </Link>
          .
        </Notice>
      )}
      {open.length === 0 ? (
        <p className="mb-4 py-2">
          No stretch is closed. That says nothing about the air in any of them: measure before you go in.
        </p>
      ) : (
        open.map((bay) => <ClosedBayPanel key={bay.closure.id} bay={bay} page={props} />)
      )}
      {mayType && (
        <Panel title="Type a reading of oxygen" id="reading" className="scroll-mt-4 print:hidden">
          <ReadingForm {...props} />
        </Panel>
      )}
      <Panel title="Released">
        <DataTable
          caption="Stretches that were closed, the last released first"
          columns={[
            {
              key: 'stretch',
              head: 'Stretch',
              rowHead: true,
              cell: ({ line, fromM, toM }) => `${line} ${fromM} to ${toM} m`,
            },
            { key: 'from', head: 'Closed', cell: ({ closedAt }) => <Instant at={closedAt} />, nowrap: true },
            { key: 'why', head: 'Why', cell: ({ reason }) => reason },
            {
              key: 'to',
              head: 'Released',
              cell: ({ releasedAt, releasedBy, releaseReason }) => (
                <>
                  {releasedAt !== null && <Instant at={releasedAt} />} by {releasedBy}
                  <span className="block text-sm text-ink-2">{releaseReason}</span>
                </>
              ),
            },
          ]}
          rows={released}
          rowKey={({ id }) => id}
          empty="None."
        />
      </Panel>
    </>
  )
}

function ClosedBayPanel({ bay, page }: { bay: ClosedBay; page: BaysPageProps }) {
  const { closure, readings, release } = bay
  return (
    <section
      aria-label={`Closed: ${closure.line} ${closure.fromM} to ${closure.toM} m`}
      className="mb-4.5 border-2 border-l-8 border-bad bg-sheet px-4 py-3"
    >
      <h2 className="text-bad">
        Closed: {closure.line} {closure.fromM} to {closure.toM} m
      </h2>
      <p>
        Since <Instant at={closure.closedAt} age />
        {closure.closedBy !== null && ` (${closure.closedBy})`}. {closure.reason}
      </p>
      {closure.eventText !== null && <p className="mt-1 font-medium">{closure.eventText}</p>}
      <div className="my-3">
        <DataTable
          caption="Readings since it was closed, the newest first"
          captionShown
          columns={[
            { key: 'at', head: 'Read', cell: ({ at }) => <Instant at={at} />, nowrap: true, rowHead: true },
            {
              key: 'percent',
              head: 'Oxygen',
              cell: ({ percent }) => `${percent.toFixed(1)} %`,
              align: 'right',
            },
            { key: 'place', head: 'Where', cell: ({ place }) => place },
            {
              key: 'instrument',
              head: 'With',
              cell: ({ instrument, doubt }) => (
                <>
                  {instrument}
                  {doubt !== '' && <span className="block text-sm text-warn">does not count: {doubt}</span>}
                </>
              ),
            },
            { key: 'tester', head: 'By', cell: ({ tester }) => tester },
          ]}
          rows={readings}
          rowKey={({ at, percent, place }) => `${at.getTime()} ${percent} ${place}`}
          empty="No reading since."
        />
      </div>
      <p className="mb-2">
        <strong>{release.ok ? 'Readings are enough for a release. ' : 'Not yet to be released. '}</strong>
        {release.missing}
      </p>
      {page.mayRelease && release.ok && <ReleaseForm closureId={closure.id} failure={page.failure} />}
      {!page.mayRelease && release.ok && <p>A safety officer releases it, signed.</p>}
    </section>
  )
}

function ReleaseForm({ closureId, failure }: { closureId: number; failure: ActionFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  const mine =
    failure?.typed?.intent === 'release' && failure.typed.closureId === String(closureId)
      ? failure
      : undefined
  return (
    <Form method="post" className="max-w-[46rem] print:hidden">
      <FormFailure failure={mine} />
      <input type="hidden" name="intent" value="release" />
      <input type="hidden" name="closureId" value={closureId} />
      <TextAreaField
        name="reason"
        label="Why it is safe to enter again"
        rows={3}
        required
        defaultValue={mine?.typed?.reason}
        errors={mine?.fields.reason}
      />
      <TextField
        name="password"
        label="Your own password, as your signature"
        type="password"
        autoComplete="current-password"
        required
        errors={mine?.fields.password}
      />
      <Button kind="danger" disabled={sending}>
        Sign: open the stretch again
      </Button>
    </Form>
  )
}

function ReadingForm({ segments, asked, now, zone, failure }: BaysPageProps) {
  const sending = useNavigation().formMethod === 'POST'
  const mine = failure !== undefined && failure.typed?.intent !== 'release' ? failure : undefined
  const typed = mine?.typed
  const errors = mine?.fields
  return (
    <Form method="post" className="max-w-[46rem]">
      <FormFailure failure={mine} />
      <input type="hidden" name="intent" value="type-oxygen" />
      <div className="grid gap-x-4 sm:grid-cols-2">
        <SelectField
          name="segment"
          label="Beside which segment"
          required
          defaultValue={typed?.segment ?? asked}
          options={[
            { value: '', label: 'Choose one' },
            ...segments.map(({ tag, line, fromM, toM }) => ({
              value: tag,
              label: `${tag} (${line} ${fromM} to ${toM} m)`,
            })),
          ]}
          errors={errors?.segment}
        />
        <TextField
          name="percent"
          label="Oxygen, %"
          hint="As shown, such as 20.8"
          inputMode="decimal"
          autoComplete="off"
          required
          defaultValue={typed?.percent}
          errors={errors?.percent}
        />
        <TextField
          name="place"
          label="Where exactly"
          hint="Metre, bay or pit, height above the floor"
          autoComplete="off"
          required
          defaultValue={typed?.place}
          errors={errors?.place}
        />
        <SiteTimeField name="at" label="When" at={now} typed={typed?.at} zone={zone} errors={errors?.at} />
        <TextField
          name="instrument"
          label="Instrument"
          hint="Serial number, or tag such as OXP-03"
          autoComplete="off"
          required
          defaultValue={typed?.instrument}
          errors={errors?.instrument}
        />
        <TextField
          name="tester"
          label="Who read it"
          hint="You, if left empty"
          autoComplete="off"
          defaultValue={typed?.tester}
          errors={errors?.tester}
        />
      </div>
      <Button kind="primary" disabled={sending} className="min-h-14">
        Write the reading down
      </Button>
    </Form>
  )
}
