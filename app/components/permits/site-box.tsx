/** The lock box on a tablet: whose personal locks are on it, putting one on, taking one's own off. */
import { Form, useNavigation } from 'react-router'
import type { SiteLocksData } from '#app/services/permit-site.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { AbsentForm, failureOf } from './site-absent-form.tsx'
import { ChoiceField, DoneByField, SignatureField } from './site-fields.tsx'
import { SiteStep, SiteSubmit } from './site-frame.tsx'

interface BoxProps {
  page: SiteLocksData
  failure: ActionFailure | undefined
}

export function SiteBox({ page, failure }: BoxProps) {
  const on = page.box.filter(({ offAt }) => offAt === null)
  return (
    <Panel title="Lock box">
      <p className="mb-3 text-ink-2">
        The keys lie inside. Whoever relies on these locks has a lock of their own on the box; as long as one
        is on, no key comes out. The primary authorised person’s goes on first and comes off last.
      </p>
      {on.length === 0 ? (
        <p className="mb-3">No personal lock is on the box.</p>
      ) : (
        on.map((lock) => <OnBox key={lock.id} lock={lock} page={page} failure={failure} />)
      )}
      {page.may.lock && <PutOn page={page} failure={failure} first={on.length === 0} box={on[0]?.boxCode} />}
    </Panel>
  )
}

function OnBox({ lock, page, failure }: { lock: SiteLocksData['box'][number] } & BoxProps) {
  const field = { name: 'boxLockId' as const, value: lock.id }
  const mine = failureOf(failure, 'box-off', field)
  const sending = useNavigation().formMethod === 'POST'
  return (
    <div className="mb-3 border-b border-rule-2 pb-2">
      <p className="mb-2">
        <strong className="text-lg font-semibold">{lock.lockNumber}</strong> of {lock.ownerName}
        {lock.primary && ', primary'} on {lock.boxCode} since <Instant at={lock.onAt} />
      </p>
      {page.may.lock && (
        <SiteStep label={`Take ${lock.lockNumber} off`} open={mine !== undefined}>
          <Form method="post">
            <FormFailure failure={mine} />
            <input type="hidden" name="act" value="box-off" />
            <input type="hidden" name="boxLockId" value={lock.id} />
            <DoneByField
              label="Taken off by"
              self={page.actor.name}
              witnessed={page.witnessed.filter(({ personId }) => personId === lock.ownerId)}
              typed={mine?.typed}
              errors={mine?.fields.by}
            />
            <SignatureField name={page.actor.name} errors={mine?.fields.password} />
            <SiteSubmit sending={sending}>Sign: off the box</SiteSubmit>
          </Form>
        </SiteStep>
      )}
      {page.may.clear && lock.ownerId !== page.actor.personId && (
        <AbsentForm
          act="box-off-absent"
          field={field}
          what={`${lock.lockNumber}, ${lock.ownerName}’s lock`}
          name={page.actor.name}
          failure={failure}
        />
      )}
    </div>
  )
}

function PutOn({ page, failure, first, box }: BoxProps & { first: boolean; box: string | undefined }) {
  const mine = failure?.typed?.act === 'box-on' ? failure : undefined
  const sending = useNavigation().formMethod === 'POST'
  return (
    <SiteStep label="Put a personal lock on the box" open={mine !== undefined}>
      <Form method="post" key={page.box.length}>
        <FormFailure failure={mine} />
        <input type="hidden" name="act" value="box-on" />
        <TextField
          name="boxCode"
          label="Box"
          hint="As it stands on the box, such as BOX-2."
          autoComplete="off"
          required
          maxLength={20}
          defaultValue={mine?.typed?.boxCode ?? box}
          errors={mine?.fields.boxCode}
        />
        <TextField
          name="lockNumber"
          label="Number of the personal lock"
          autoComplete="off"
          autoCapitalize="characters"
          required
          maxLength={20}
          defaultValue={mine?.typed?.lockNumber}
          errors={mine?.fields.lockNumber}
        />
        <ChoiceField
          name="primary"
          label={first ? 'The first lock is the primary authorised person’s' : 'Whose lock it is'}
          options={[
            { value: 'yes', label: 'Primary authorised person' },
            { value: 'no', label: 'One of the crew' },
          ]}
          chosen={mine?.typed?.primary}
          errors={mine?.fields.primary}
        />
        <DoneByField
          label="Put on by"
          self={page.actor.name}
          witnessed={page.witnessed}
          typed={mine?.typed}
          errors={mine?.fields.by}
        />
        <SignatureField name={page.actor.name} errors={mine?.fields.password} />
        <SiteSubmit sending={sending}>Sign: on the box</SiteSubmit>
      </Form>
    </SiteStep>
  )
}
