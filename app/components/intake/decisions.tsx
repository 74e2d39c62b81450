/** What a person does with a file that has been read: answer, take in, discard. Plain forms, each with its intent. */
import { Form, useNavigation } from 'react-router'
import { placeText } from '#app/domain/night-files/refusal-text.ts'
import type { Question, ReadOut } from '#app/domain/night-files/types.ts'
import { ANSWER_PREFIX } from '#app/domain/schemas/import-decision.ts'
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

export function DiscardPanel({ failure }: { failure: ActionFailure | undefined }) {
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
          defaultValue={failure?.typed?.reason}
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
    <Panel title="Questions">
      <Form method="post">
        <input type="hidden" name="intent" value="answer" />
        {questions.map((question) => (
          <QuestionField
            key={question.id}
            question={question}
            typed={failure?.typed?.[`${ANSWER_PREFIX}${question.id}`]}
          />
        ))}
        <Button>Read again with these answers</Button>
      </Form>
    </Panel>
  )
}

function QuestionField({ question, typed }: { question: Question; typed: string | undefined }) {
  const place = placeText(question)
  const { choices } = question
  return (
    <div className="mb-2">
      <SelectField
        name={`${ANSWER_PREFIX}${question.id}`}
        label={question.text}
        defaultValue={typed ?? ''}
        options={[
          {
            value: '',
            label: question.blocking ? 'Not answered: nothing can be taken in' : 'Not answered: left out',
          },
          ...choices,
        ]}
        hint={`${place === '' ? '' : `In ${place}: `}${question.found}. ${question.mend}`}
      />
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
