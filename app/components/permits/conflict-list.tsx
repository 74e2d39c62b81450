/** What stands against a permit from outside, with the officer's rulings and the form to give one. */
import { Form, useNavigation } from 'react-router'
import type { ConflictEffect, ConflictFact, ConflictRule } from '#app/domain/permit-facts.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { Button } from '../ui/button.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import type { MarkedStretch } from './tube-conflicts.tsx'

export const CONFLICT_RULE_LABELS: Record<ConflictRule, string> = {
  K1: 'Segment claimed twice',
  K2: 'Heat on both sides of a valve',
  K3: 'People within the exclusion',
  K4: 'Opened next door',
  K5: 'Power',
  K6: 'Shared utilities',
  K7: 'Same lock, cart or holder',
  K8: 'Competence or licence',
  K9: 'Fire detection out of order',
  K10: 'Lifting over heat',
  K11: 'Calendar of the site',
  K12: 'Spraying near heat',
}

const EFFECTS: Record<ConflictEffect, { word: string; look: string }> = {
  block: { word: 'Blocks approval', look: 'border-bad bg-bad-soft' },
  ruling: { word: 'Needs an officer’s ruling', look: 'border-warn bg-warn-soft' },
  warning: { word: 'To be known', look: 'border-edge bg-rule-2' },
}

/** Stretches of conflicts for the drawing of the tube. */
export function markedConflicts(conflicts: readonly ConflictFact[]): MarkedStretch[] {
  return conflicts.flatMap(({ key, rule, effect, place }) =>
    place === null ? [] : [{ key, label: `${rule} ${CONFLICT_RULE_LABELS[rule]}`, look: effect, ...place }],
  )
}

/**
 * @param ruling given where the reader may rule: the permit's revision. Whoever may not rule on this one is told so
 * @param failure a refused form of this page, whose message stands above it; its fields are marked at their conflict
 */
export function ConflictList({
  conflicts,
  ruling,
  failure,
}: {
  conflicts: readonly ConflictFact[]
  ruling: { revision: number } | null
  failure: ActionFailure | undefined
}) {
  const refused = failure?.typed?.act === 'rule' ? failure : undefined
  const placed = conflicts.some(({ key }) => key === refused?.typed?.key)
  return (
    <>
      {/* The conflict that was ruled on may be gone by now; what was typed must not go with it. */}
      {refused !== undefined && !placed && (refused.typed?.text ?? '') !== '' && (
        <p className="mb-3 whitespace-pre-line">You had written: {refused.typed?.text}</p>
      )}
      {conflicts.length === 0 && (
        <p className="py-1 text-ink-2">None was found among permits, works, power, people and calendar.</p>
      )}
      <ul>
        {conflicts.map((conflict) => (
          <li key={conflict.key} className="unbroken mb-3 last:mb-0">
            <Conflict
              conflict={conflict}
              ruling={ruling}
              failure={refused?.typed?.key === conflict.key ? refused : undefined}
            />
          </li>
        ))}
      </ul>
    </>
  )
}

function standing({ effect, ruling }: ConflictFact): { word: string; look: string } {
  if (effect !== 'ruling' || ruling === null) return EFFECTS[effect]
  if (ruling.stale) return { ...EFFECTS.ruling, word: 'Ruling no longer holds: the facts have changed' }
  return ruling.allowed
    ? { word: 'Allowed by ruling', look: 'border-vac bg-vac-soft' }
    : { word: 'Not allowed by ruling', look: EFFECTS.block.look }
}

function Conflict({
  conflict,
  ruling,
  failure,
}: {
  conflict: ConflictFact
  ruling: { revision: number } | null
  failure: ActionFailure | undefined
}) {
  const { rule, effect, text, wayOut, key } = conflict
  const { word, look } = standing(conflict)
  return (
    <div className={`border-l-4 px-3 py-2 ${look}`}>
      <h3 className="font-semibold">
        {rule} {CONFLICT_RULE_LABELS[rule]} · {word}
      </h3>
      <p className="mt-1">{text}</p>
      <p className="mt-1 text-ink-2">{wayOut}</p>
      {conflict.ruling !== null && (
        <p className="mt-1">
          <span className="font-medium">
            {conflict.ruling.by}, <Instant at={conflict.ruling.at} />
            {conflict.ruling.allowed ? ' allowed it: ' : ' did not allow it: '}
          </span>
          <span className="whitespace-pre-line">{conflict.ruling.text}</span>
        </p>
      )}
      {effect === 'ruling' && ruling !== null && (
        <div className="mt-2 print:hidden">
          <details open={failure !== undefined}>
            <summary className="link inline-block cursor-pointer py-1.5">
              {conflict.ruling === null ? 'Rule on it' : 'Rule on it anew'}
            </summary>
            <RulingForm conflictKey={key} revision={ruling.revision} failure={failure} />
          </details>
        </div>
      )}
    </div>
  )
}

function RulingForm({
  conflictKey,
  revision,
  failure,
}: {
  conflictKey: string
  revision: number
  failure: ActionFailure | undefined
}) {
  const sending = useNavigation().formMethod === 'POST'
  const { typed, fields = {} } = failure ?? {}
  return (
    <Form method="post" className="mt-2 max-w-xl">
      <input type="hidden" name="act" value="rule" />
      <input type="hidden" name="key" value={conflictKey} />
      <input type="hidden" name="revision" value={revision} />
      <fieldset className="mb-3">
        <legend className="mb-1 font-medium">Your ruling</legend>
        {(
          [
            ['yes', 'It may go on, as I say below'],
            ['no', 'It may not'],
          ] as const
        ).map(([value, label]) => (
          <label key={value} className="flex min-h-8 items-center gap-2.5 pointer-coarse:min-h-11">
            <input
              type="radio"
              name="allowed"
              value={value}
              required
              defaultChecked={typed?.allowed === value}
              className="size-5 shrink-0 accent-ink"
            />
            {label}
          </label>
        ))}
        {fields.allowed?.map((error) => (
          <p key={error} className="mt-1 text-sm text-bad">
            {error}
          </p>
        ))}
      </fieldset>
      <TextAreaField
        name="text"
        label="In words"
        hint="Which barrier, where and until when; who watches; or why not."
        rows={3}
        required
        minLength={10}
        maxLength={2000}
        defaultValue={typed?.text ?? ''}
        errors={fields.text}
      />
      <TextField
        name="password"
        label="Your own password, as your signature"
        type="password"
        autoComplete="current-password"
        required
        errors={fields.password}
      />
      <Button kind="primary" disabled={sending}>
        {sending ? 'Signing' : 'Sign the ruling'}
      </Button>
    </Form>
  )
}
