import { useEffect, useRef } from 'react'
import type { ActionFailure } from './failure.ts'

/**
 * Says above a form that nothing has been saved and why. It takes the focus when it appears, so that a reader who
 * cannot see the page change hears it, and the keyboard goes on from there into the form.
 */
export function FormFailure({ failure }: { failure: ActionFailure | undefined }) {
  const ref = useRef<HTMLDivElement>(null)
  useEffect(() => {
    if (failure !== undefined) ref.current?.focus()
  }, [failure])
  if (failure === undefined) return null
  const unplaced = failure.fields.form ?? []
  return (
    <div ref={ref} tabIndex={-1} role="alert" className="mb-4 border-l-4 border-bad bg-bad-soft px-3 py-2">
      <p>{failure.message}</p>
      {unplaced.map((error) => (
        <p key={error}>{error}</p>
      ))}
    </div>
  )
}
