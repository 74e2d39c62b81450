import type { IsolationTestState } from '#app/domain/planning.ts'

const STATES: Record<IsolationTestState, { label: string; look: string }> = {
  recorded: { label: 'Recorded, not accepted yet', look: 'border-edge' },
  accepted: { label: 'Accepted', look: 'border-vac bg-vac-soft' },
  voided: { label: 'Voided', look: 'border-bad bg-bad-soft' },
}

/** Where a test stands, in a word with a frame. */
export function TestState({ state }: { state: IsolationTestState }) {
  const { label, look } = STATES[state]
  return <span className={`inline-block rounded-sm border px-1.5 text-sm ${look}`}>{label}</span>
}
