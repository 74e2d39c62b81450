/** What a person does with a file that has been read: answer, take in, discard. Plain forms, each with its intent. */
import { Form, useNavigation } from 'react-router'
import { placeText } from '#app/domain/night-files/refusal-text.ts'
import type { Question, ReadOut } from '#app/domain/night-files/types.ts'
import { ANSWER_PREFIX, TYPED_PREFIX } from '#app/domain/schemas/import-decision.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { Button } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Panel } from '../ui/panel.tsx'
import { countText } from './file-words.ts'

/** The button that takes the file in. */
export function TakeIn({ readOut }: { readOut: ReadOut }) {
  const busy = useNavigation().formData?.get('intent') === 'accept'
  return (
    <Form method="post">
      <input type="hidden" name="intent" value="accept" />
      <Button kind="primary" disabled={busy || readOut.state !== 'readable'}>
        {busy
          ? 'Taking in'
          : readOut.state === 'readable'
            ? `Take in ${countText(readOut.readings.total)} readings`
            : 'Take in'}
      </Button>
    </Form>
  )
}

/** @param reason proposed where the product knows one */
export function DiscardPanel({ failure, reason }: { failure: ActionFailure | undefined; reason?: string }) {
  return (
    <Panel title="Discard this file" id="discard">
      <p className="mb-3 text-ink-2">Its bytes and this report stay; none of its readings is stored.</p>
      <Form method="post" className="max-w-xl">
        <input type="hidden" name="intent" value="discard" />
        <TextField
          name="reason"
          label="Why it is not wanted"
          required
          minLength={3}
          maxLength={1000}
          defaultValue={failure?.typed?.reason ?? reason}
          errors={failure?.fields.reason}
        />
        <Button kind="danger">Discard</Button>
      </Form>
    </Panel>
  )
}

/** The questions that the file leaves open, those first without which nothing can be taken in. */
export function QuestionsPanel({
  readOut,
  failure,
}: {
  readOut: ReadOut
  failure: ActionFailure | undefined
}) {
  const questions = [...readOut.questions].sort((a, b) => Number(b.blocking) - Number(a.blocking))
  if (questions.length === 0) return null
  return (
    <Panel title="Questions" id="questions">
      <Form method="post">
        <input type="hidden" name="intent" value="answer" />
        {questions.map((question) => (
          <QuestionField
            key={question.id}
            question={question}
            chosen={failure?.typed?.[`${ANSWER_PREFIX}${question.id}`]}
            typed={failure?.typed?.[`${TYPED_PREFIX}${question.id}`]}
          />
        ))}
        <Button>Read again with these answers</Button>
      </Form>
    </Panel>
  )
}

/** What becomes of a file while a question stands open. */
function openWords({ blocking, kind }: Question): string {
  if (blocking) return 'Not answered: nothing can be taken in'
  if (kind === 'floor') return 'Not answered: counts as measured'
  if (kind === 'basis' || kind === 'averaging') return 'Not answered: stored as written'
  return 'Not answered: left out'
}

function QuestionField({
  question,
  chosen,
  typed,
}: {
  question: Question
  chosen: string | undefined
  typed: string | undefined
}) {
  const place = placeText(question)
  const { choices } = question
  const mayType = question.typed === 'time'
  const hint = `${place === '' ? '' : `In ${place}: `}${question.found}. ${question.mend}`
  return (
    <div className="mb-2">
      {(choices.length > 0 || !mayType) && (
        <SelectField
          name={`${ANSWER_PREFIX}${question.id}`}
          label={question.text}
          defaultValue={chosen ?? ''}
          options={[{ value: '', label: openWords(question) }, ...choices]}
          hint={hint}
        />
      )}
      {mayType && (
        <TextField
          name={`${TYPED_PREFIX}${question.id}`}
          label={choices.length > 0 ? 'Or another time, on the clock of the logger' : question.text}
          defaultValue={typed}
          autoComplete="off"
          maxLength={40}
          hint={`${choices.length > 0 ? '' : `${hint} `}Year first, on the clock of the logger, such as 2026-11-02 06:00. ${choices.length > 0 ? 'It counts instead of the choice above.' : `${openWords(question)}.`}`}
        />
      )}
      {choices.some(({ candidates }) => candidates.length > 0) && (
        <ul className="mb-3 text-sm text-ink-2">
          {choices.map(({ value, label, candidates }) => (
            <li key={value}>
              {label}: {candidates.map(({ text, meaning }) => `${text} is ${meaning}`).join('; ')}
            </li>
          ))}
        </ul>
      )}
    </div>
  )
}
