/** Locks of a permit on a tablet: one card a point, with the steps that come next there. */
import { Form, useNavigation } from 'react-router'
import { PERMIT_STATE_LABELS } from '#app/domain/permit-words.ts'
import type { PointLine } from '#app/services/isolation-points.server.ts'
import type { SiteLocksData } from '#app/services/permit-site.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { AbsentForm, failureOf } from './site-absent-form.tsx'
import { SiteBox } from './site-box.tsx'
import { DoneByField, SignatureField } from './site-fields.tsx'
import { SiteFrame, SiteStep, SiteSubmit } from './site-frame.tsx'

export interface SiteLocksProps {
  page: SiteLocksData
  failure: ActionFailure | undefined
}

export function SiteLocks({ page, failure }: SiteLocksProps) {
  return (
    <SiteFrame head={page} here="/locks" title="Isolation points and locks">
      {/* A form that has gone meanwhile cannot say why it was refused. */}
      {!hasForm(page, failure) && <FormFailure failure={failure} />}
      {page.lines.length === 0 && <p className="mb-4">This permit names no isolation points.</p>}
      {page.lines.map((line) => (
        <PointCard key={`${line.tag}/${line.lock?.id ?? 0}`} line={line} page={page} failure={failure} />
      ))}
      {(page.boxed || page.box.length > 0) && <SiteBox page={page} failure={failure} />}
    </SiteFrame>
  )
}

/** Whether the form that was refused is still on the page. */
function hasForm({ lines, box }: SiteLocksData, failure: ActionFailure | undefined): boolean {
  const typed = failure?.typed ?? {}
  const { act } = typed
  if (act === 'box-on') return true
  if (act === 'box-off' || act === 'box-off-absent') {
    return box.some(({ id, offAt }) => offAt === null && String(id) === typed.boxLockId)
  }
  return lines.some(({ tag, lock }) => {
    const hangs = lock !== null && lock.removed === null
    if (act === 'apply') return !hangs && tag === typed.tag
    return hangs && String(lock.id) === typed.pointId && (act !== 'verify' || lock.verified === null)
  })
}

function PointCard({ line, page, failure }: { line: PointLine } & SiteLocksProps) {
  const { lock } = line
  const hangs = lock !== null && lock.removed === null
  return (
    <Panel title={line.tag}>
      <p className="text-lg">
        {line.isolates}: <strong className="font-semibold">{line.required}</strong>
      </p>
      <p className="mb-3 text-ink-2">
        {line.purpose === 'to-heat'
          ? 'Must not move or be fed while it is heated.'
          : 'Keeps heating energy away from people.'}
        {line.boxed && ' Its key goes into the lock box.'}
        {!line.asked && ' The terms no longer name it.'}
      </p>
      <LockStory line={line} />
      {page.may.lock && line.asked && !hangs && <ApplyForm line={line} page={page} failure={failure} />}
      {hangs && page.may.lock && lock.verified === null && (
        <VerifyForm lock={lock} page={page} failure={failure} />
      )}
      {hangs && page.may.lock && <RemoveForm lock={lock} page={page} failure={failure} />}
      {hangs && (page.may.lock || page.may.clear) && (
        <TransferForm lock={lock} page={page} failure={failure} />
      )}
      {hangs && page.may.clear && lock.ownerId !== page.actor.personId && (
        <AbsentForm
          act="remove-absent"
          field={{ name: 'pointId', value: lock.id }}
          revision={lock.revision}
          what={`${lock.number}, ${lock.owner}’s lock`}
          name={page.actor.name}
          failure={failure}
        />
      )}
    </Panel>
  )
}

function LockStory({ line: { lock } }: { line: PointLine }) {
  if (lock === null) return <p className="mb-3">No lock yet.</p>
  const { number, applied, verified, removed } = lock
  return (
    <div className="mb-3">
      <p className="text-2xl font-semibold">
        {removed === null ? number : <span className="line-through">{number}</span>}
        {lock.tagNumber !== '' && (
          <span className="text-base font-normal text-ink-2"> tag {lock.tagNumber}</span>
        )}
      </p>
      <p>
        Applied by {applied.by}, <Instant at={applied.at} />
        {applied.witness !== null && ` (entered by ${applied.witness})`}
      </p>
      {verified === null ? (
        removed === null && (
          <p className="my-1 inline-block rounded-sm border border-warn bg-warn-soft px-2 py-0.5 font-semibold text-warn">
            not verified yet
          </p>
        )
      ) : (
        <p>
          Verified by {verified.by}, <Instant at={verified.at} />
          {verified.witness !== null && ` (entered by ${verified.witness})`}. Stored energy:{' '}
          {verified.releasedHow}. Check: {verified.zeroEnergy}
        </p>
      )}
      {removed !== null && (
        <p>
          {removed.how === 'transferred' ? 'Given over to another permit by ' : 'Taken away by '}
          {removed.by}, <Instant at={removed.at} />
          {removed.how === 'owner-absent' && ', its owner absent'}
        </p>
      )}
      {lock.note !== '' && <p className="text-ink-2">{lock.note}</p>}
    </div>
  )
}

type Lock = NonNullable<PointLine['lock']>

function ApplyForm({ line, page, failure }: { line: PointLine } & SiteLocksProps) {
  const mine = failureOf(failure, 'apply', { name: 'tag', value: line.tag })
  const sending = useNavigation().formMethod === 'POST'
  return (
    <SiteStep label="Apply a lock" open={mine !== undefined}>
      <Form method="post">
        <FormFailure failure={mine} />
        <input type="hidden" name="act" value="apply" />
        <input type="hidden" name="tag" value={line.tag} />
        <TextField
          name="lockNumber"
          label="Lock number"
          hint="As it stands on the lock, such as L-114."
          autoComplete="off"
          autoCapitalize="characters"
          required
          maxLength={20}
          defaultValue={mine?.typed?.lockNumber}
          errors={mine?.fields.lockNumber}
        />
        <TextField
          name="tagNumber"
          label="Tag number, if there is one"
          autoComplete="off"
          maxLength={20}
          defaultValue={mine?.typed?.tagNumber}
          errors={mine?.fields.tagNumber}
        />
        <DoneByField
          label="Applied by"
          self={page.actor.name}
          witnessed={page.witnessed}
          typed={mine?.typed}
          errors={mine?.fields.by}
        />
        <TextField
          name="note"
          label="Note, if any"
          maxLength={500}
          defaultValue={mine?.typed?.note}
          errors={mine?.fields.note}
        />
        <SignatureField name={page.actor.name} errors={mine?.fields.password} />
        <SiteSubmit sending={sending}>Sign: lock applied</SiteSubmit>
      </Form>
    </SiteStep>
  )
}

function LockFields({ act, lock }: { act: string; lock: Lock }) {
  return (
    <>
      <input type="hidden" name="act" value={act} />
      <input type="hidden" name="pointId" value={lock.id} />
      <input type="hidden" name="revision" value={lock.revision} />
    </>
  )
}

function VerifyForm({ lock, page, failure }: { lock: Lock } & SiteLocksProps) {
  const mine = failureOf(failure, 'verify', { name: 'pointId', value: lock.id })
  const sending = useNavigation().formMethod === 'POST'
  return (
    <SiteStep label="Verify this lock" open={mine !== undefined}>
      <p className="mb-3">By somebody else than {lock.owner}: release what is stored, then try the point.</p>
      <Form method="post">
        <FormFailure failure={mine} />
        <LockFields act="verify" lock={lock} />
        <TextField
          name="releasedHow"
          label="How stored energy was released"
          hint="Where there is none, say so."
          required
          maxLength={500}
          defaultValue={mine?.typed?.releasedHow}
          errors={mine?.fields.releasedHow}
        />
        <TextField
          name="zeroEnergy"
          label="What trying or measuring it gave"
          hint="Such as: handwheel does not move; 0 V at the bars."
          required
          maxLength={500}
          defaultValue={mine?.typed?.zeroEnergy}
          errors={mine?.fields.zeroEnergy}
        />
        <DoneByField
          label="Verified by"
          self={page.actor.name}
          witnessed={page.witnessed}
          typed={mine?.typed}
          errors={mine?.fields.by}
        />
        <SignatureField name={page.actor.name} errors={mine?.fields.password} />
        <SiteSubmit sending={sending}>Sign: verified</SiteSubmit>
      </Form>
    </SiteStep>
  )
}

function RemoveForm({ lock, page, failure }: { lock: Lock } & SiteLocksProps) {
  const mine = failureOf(failure, 'remove', { name: 'pointId', value: lock.id })
  const sending = useNavigation().formMethod === 'POST'
  return (
    <SiteStep label="Take this lock away" open={mine !== undefined}>
      <p className="mb-3">
        {lock.number} is the lock of {lock.owner}, who takes it away; nobody else does.
      </p>
      <Form method="post">
        <FormFailure failure={mine} />
        <LockFields act="remove" lock={lock} />
        <DoneByField
          label="Taken away by"
          self={page.actor.name}
          witnessed={page.witnessed.filter(({ personId }) => personId === lock.ownerId)}
          typed={mine?.typed}
          errors={mine?.fields.by}
        />
        <TextField
          name="note"
          label="Note, if any"
          maxLength={500}
          defaultValue={mine?.typed?.note}
          errors={mine?.fields.note}
        />
        <SignatureField name={page.actor.name} errors={mine?.fields.password} />
        <SiteSubmit kind="danger" sending={sending}>
          Sign: lock taken away
        </SiteSubmit>
      </Form>
    </SiteStep>
  )
}

function TransferForm({ lock, page, failure }: { lock: Lock } & SiteLocksProps) {
  const mine = failureOf(failure, 'transfer', { name: 'pointId', value: lock.id })
  const sending = useNavigation().formMethod === 'POST'
  const takers = page.takers[lock.id] ?? []
  if (takers.length === 0) return null
  return (
    <SiteStep label="Give it over to another permit" open={mine !== undefined}>
      <p className="mb-3">
        The lock stays where it hangs and stays {lock.owner}’s. The other permit has it verified anew.
      </p>
      <Form method="post">
        <FormFailure failure={mine} />
        <LockFields act="transfer" lock={lock} />
        <SelectField
          name="to"
          label="Permit that lists the same point"
          required
          defaultValue={mine?.typed?.to ?? ''}
          options={[
            { value: '', label: 'Choose' },
            ...takers.map(({ number, state }) => ({
              value: number,
              label: `${number}, ${PERMIT_STATE_LABELS[state].toLowerCase()}`,
            })),
          ]}
          errors={mine?.fields.to}
        />
        <TextField
          name="note"
          label="Why"
          maxLength={500}
          defaultValue={mine?.typed?.note}
          errors={mine?.fields.note}
        />
        <SignatureField name={page.actor.name} errors={mine?.fields.password} />
        <SiteSubmit sending={sending}>Sign: given over</SiteSubmit>
      </Form>
    </SiteStep>
  )
}
