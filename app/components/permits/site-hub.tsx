/** The first tablet page of a permit: how it stands, what is next, the check of the site, photos. */
import { Form, useNavigation } from 'react-router'
import type { SiteHubData } from '#app/services/permit-site.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, Panel } from '../ui/panel.tsx'
import { ChoiceField } from './site-fields.tsx'
import { SiteFrame, SiteLink, SiteSubmit } from './site-frame.tsx'

export interface SiteHubProps {
  page: SiteHubData
  failure: ActionFailure | undefined
  photoMib: number
}

export function SiteHub({ page, failure, photoMib }: SiteHubProps) {
  const permit = `/permits/${page.number}`
  const { next } = page
  return (
    <SiteFrame head={page} here="" title={page.title}>
      <Notice lead="Next: ">
        {next.text}
        {(next.place === 'locks' || next.place === 'tests') && (
          <div className="mt-2">
            <SiteLink to={`${permit}/site/${next.place}`}>
              {next.place === 'locks' ? 'To the locks' : 'To the tests'}
            </SiteLink>
          </div>
        )}
        {(next.place === 'permit' || next.place === 'heating') && (
          <div className="mt-2">
            <SiteLink to={permit}>To the permit: accept, revalidate, hand over</SiteLink>
          </div>
        )}
      </Notice>
      <Standing page={page} />
      {page.state === 'issued' && (
        <div className="mb-4.5">
          <SiteLink to={`${permit}#stop`}>Stop the work</SiteLink>
        </div>
      )}
      {page.may.check && ['approved', 'issued', 'suspended'].includes(page.state) && (
        <CheckPanel page={page} failure={failure} />
      )}
      <PhotoPanel page={page} failure={failure} photoMib={photoMib} />
    </SiteFrame>
  )
}

function Standing({ page }: { page: SiteHubData }) {
  const { points, tests, locksOut, heating, check, lastRound } = page
  return (
    <Panel title="How it stands">
      <Facts
        items={[
          {
            name: 'Isolation points locked and verified',
            value: `${points.held} of ${points.of}`,
          },
          {
            name: 'Locks that hang',
            value: locksOut.length === 0 ? 'none' : locksOut.join(', '),
          },
          {
            name: 'Tests good and in date',
            value: `${tests.good} of ${tests.of}${tests.overdue > 0 ? `; ${tests.overdue} overdue or failed` : ''}`,
          },
          {
            name: 'Barriers and signs checked',
            value:
              check === null ? (
                'not yet'
              ) : (
                <>
                  <Instant at={check.at} /> by {check.by ?? 'somebody'}
                  {!check.counts && ' (to be checked again)'}
                </>
              ),
          },
          {
            name: 'Last round',
            value:
              lastRound === null ? (
                'none yet'
              ) : (
                <>
                  <Instant at={lastRound.at} age />
                  {lastRound.inOrder ? ', in order' : <span className="text-warn">, not in order</span>}
                </>
              ),
          },
        ]}
      />
      <p className="mt-2">
        <strong className="font-semibold">Heating: </strong>
        {heating.on === null && <strong className="font-semibold text-warn">take it for on. </strong>}
        {heating.text}
      </p>
    </Panel>
  )
}

function CheckPanel({ page, failure }: { page: SiteHubData; failure: ActionFailure | undefined }) {
  const mine = failure?.typed?.act === 'site-check' ? failure : undefined
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Panel title="Site check">
      <Form method="post" key={page.check?.at.getTime() ?? 0}>
        <FormFailure failure={mine} />
        <input type="hidden" name="act" value="site-check" />
        <input type="hidden" name="revision" value={page.revision} />
        <ChoiceField
          name="barriersPlaced"
          label="Barriers stand at both ends of the exclusion length"
          options={[
            { value: 'yes', label: 'They stand' },
            { value: 'no', label: 'They do not' },
          ]}
          chosen={mine?.typed?.barriersPlaced}
          errors={mine?.fields.barriersPlaced}
        />
        <ChoiceField
          name="signsPosted"
          label="Signs and the posted copy are up"
          options={[
            { value: 'yes', label: 'They are up' },
            { value: 'no', label: 'They are not' },
          ]}
          chosen={mine?.typed?.signsPosted}
          errors={mine?.fields.signsPosted}
        />
        <TextAreaField
          name="text"
          label="What you saw"
          hint="Needed where something is not in order."
          rows={3}
          maxLength={2000}
          defaultValue={mine?.typed?.text}
          errors={mine?.fields.text}
        />
        <SiteSubmit sending={sending}>Write the check down</SiteSubmit>
      </Form>
    </Panel>
  )
}

function PhotoPanel({ page, failure, photoMib }: SiteHubProps) {
  const mine = failure?.typed?.act === 'photo' ? failure : undefined
  const sending = useNavigation().formMethod === 'POST'
  const { photos } = page
  return (
    <Panel title="Photos">
      {photos.length === 0 ? (
        <p className="mb-3 text-ink-2">No photos yet.</p>
      ) : (
        <ul className="mb-3">
          {photos.map((photo) => (
            <li key={photo.id} className="border-b border-rule-2">
              <a
                href={`/permits/${page.number}/photos/${photo.id}`}
                download
                className="link flex min-h-14 items-center break-all"
              >
                {photo.fileName}
              </a>
              <p className="pb-2 text-sm text-ink-3">
                <Instant at={photo.createdAt} /> by {photo.createdByName ?? 'the product'},{' '}
                {Math.max(1, Math.round(photo.byteSize / 1024))} KiB
              </p>
            </li>
          ))}
        </ul>
      )}
      {page.may.test && (
        <Form
          method="post"
          action={`/permits/${page.number}/site?photo`}
          encType="multipart/form-data"
          key={photos.length}
        >
          <FormFailure failure={mine} />
          <TextField
            name="caption"
            label="What it shows"
            hint="Such as: barrier at 600 m."
            maxLength={120}
            defaultValue={mine?.typed?.caption}
            errors={mine?.fields.caption}
          />
          <TextField
            name="photo"
            type="file"
            accept="image/jpeg,image/png,image/webp"
            label="Photo"
            hint={`JPEG, PNG or WebP, up to ${photoMib} MiB.`}
            required
            errors={mine?.fields.photo}
          />
          <SiteSubmit kind="plain" sending={sending}>
            Keep the photo
          </SiteSubmit>
        </Form>
      )}
    </Panel>
  )
}
