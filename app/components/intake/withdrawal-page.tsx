/** Withdrawing an accepted import: who has asked, who has agreed, and the one form that comes next. */
import { Form, Link, useNavigation } from 'react-router'
import { IMPORT_STATE_LABELS } from '#app/domain/imports.ts'
import type { WithdrawalPageData } from '#app/services/intake-withdrawal.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button } from '../ui/button.tsx'
import { TextAreaField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { countOf } from './file-words.ts'
import { StateTag, TONE_OF_STATE } from './state-tag.tsx'

type Wish = WithdrawalPageData['wishes'][number]

const WISH_WORDS: Record<Wish['state'], string> = {
  asked: 'waits for an engineer',
  agreed: 'waits for an administrator',
  done: 'withdrawn',
  refused: 'turned down',
}

export function WithdrawalPage({
  file,
  wishes,
  may,
  failure,
}: WithdrawalPageData & { failure: ActionFailure | undefined }) {
  const nothing = !may.ask && !may.agree && !may.refuse && !may.withdraw
  return (
    <>
      <PageHead
        title={`Withdraw import ${file.id}`}
        crumbs={
          <>
            <Link to="/intake" className="link inline-block py-0.5">
              Log intake
            </Link>
            {' / '}
            <Link to={`/intake/${file.id}`} className="link inline-block py-0.5">
              {file.fileName}
            </Link>
          </>
        }
      >
        <StateTag word={IMPORT_STATE_LABELS[file.state]} tone={TONE_OF_STATE[file.state]} /> {file.sourceCode}
        , {file.sourceName}
        {file.readingCount !== null && ` · ${countOf(file.readingCount, 'reading', 'readings')}`}
        {file.firstAt !== null && file.lastAt !== null && (
          <>
            {' · '}
            <Instant at={file.firstAt} /> to <Instant at={file.lastAt} />
          </>
        )}
      </PageHead>
      <FormFailure failure={failure} />
      <div className="max-w-2xl">
        {file.state === 'accepted' && (
          <Notice>
            A withdrawn import leaves every curve, limit and fit, all of its readings at once. They stay with
            the import, and so do the bytes of the file. What was computed from them is marked as out of date.
          </Notice>
        )}
        <WishList wishes={wishes} />
        {may.ask && <AskPanel failure={failure} />}
        {may.agree && (
          <StepPanel
            title="Agree"
            intent="agree"
            words="I have looked at the file and its readings are wrong."
            button="Agree to the withdrawal"
          />
        )}
        {may.withdraw && (
          <StepPanel
            title="Withdraw"
            intent="withdraw"
            words="The readings go at once. The file can be sent and taken in again afterwards."
            button="Withdraw this import"
            danger
          />
        )}
        {may.refuse && <RefusePanel failure={failure} />}
        {nothing && <p className="text-ink-2">{whyNothing(file.state, wishes[0])}</p>}
      </div>
    </>
  )
}

function whyNothing(state: WithdrawalPageData['file']['state'], newest: Wish | undefined): string {
  if (state !== 'accepted')
    return `Only an import that is “${IMPORT_STATE_LABELS.accepted}” can be withdrawn; this one is “${IMPORT_STATE_LABELS[state]}”.`
  if (newest?.state === 'asked') return 'The next step is an engineer’s, and not the one’s who asked.'
  if (newest?.state === 'agreed') return 'The next step is an administrator’s, and not the one’s who agreed.'
  return 'Technicians, engineers and administrators can ask for a withdrawal.'
}

function WishList({ wishes }: { wishes: readonly Wish[] }) {
  if (wishes.length === 0) return null
  return (
    <Panel title="What has been asked and decided">
      <ul>
        {wishes.map((wish) => (
          <li key={wish.id} className="border-b py-2 last:border-b-0">
            <p>
              <span className="font-medium">{WISH_WORDS[wish.state]}</span>: {wish.reason}
            </p>
            <p className="text-sm text-ink-2">
              Asked by {wish.askedBy}, <Instant at={wish.askedAt} />
              {wish.agreedAt !== null && (
                <>
                  {' · '}agreed by {wish.agreedBy}, <Instant at={wish.agreedAt} />
                </>
              )}
              {wish.closedAt !== null && (
                <>
                  {' · '}
                  {WISH_WORDS[wish.state]} by {wish.closedBy}, <Instant at={wish.closedAt} />
                </>
              )}
            </p>
            {wish.refusal !== '' && <p className="text-sm">Why not: {wish.refusal}</p>}
          </li>
        ))}
      </ul>
    </Panel>
  )
}

function AskPanel({ failure }: { failure: ActionFailure | undefined }) {
  const sending = useNavigation().formMethod === 'POST'
  return (
    <Panel title="Ask for it">
      <Form method="post">
        <input type="hidden" name="intent" value="ask" />
        <TextAreaField
          name="reason"
          label="What is wrong with this import"
          hint="An engineer reads this before agreeing, and it stays with the readings."
          rows={3}
          required
          minLength={5}
          maxLength={1000}
          defaultValue={failure?.typed?.reason}
          errors={failure?.fields.reason}
        />
        <Button kind="primary" disabled={sending}>
          Ask for the withdrawal
        </Button>
      </Form>
    </Panel>
  )
}

function StepPanel({
  title,
  intent,
  words,
  button,
  danger = false,
}: {
  title: string
  intent: 'agree' | 'withdraw'
  words: string
  button: string
  danger?: boolean
}) {
  const sending = useNavigation().formData?.get('intent') === intent
  return (
    <Panel title={title}>
      <p className="mb-3 text-ink-2">{words}</p>
      <Form method="post">
        <input type="hidden" name="intent" value={intent} />
        <Button kind={danger ? 'danger' : 'primary'} disabled={sending}>
          {button}
        </Button>
      </Form>
    </Panel>
  )
}

function RefusePanel({ failure }: { failure: ActionFailure | undefined }) {
  return (
    <Panel title="Turn it down">
      <Form method="post">
        <input type="hidden" name="intent" value="refuse" />
        <TextAreaField
          name="refusal"
          label="Why the import should stay"
          rows={2}
          required
          minLength={5}
          maxLength={1000}
          defaultValue={failure?.typed?.refusal}
          errors={failure?.fields.refusal}
        />
        <Button>Turn the wish down</Button>
      </Form>
    </Panel>
  )
}
