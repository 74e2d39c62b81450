import { useEffect, useRef } from 'react'
import { useLocation } from 'react-router'

/**
 * A button that opens a short list over the page. It is a `details` element, so it opens without any script too.
 *
 * @param note something inside that wants to be seen; the button then carries a dot, and says it
 */
export function Menu({
  label,
  note,
  children,
}: {
  label: string
  note?: string | undefined
  children: React.ReactNode
}) {
  const ref = useRef<HTMLDetailsElement>(null)
  const { key } = useLocation()

  // biome-ignore lint/correctness/useExhaustiveDependencies: each new page closes the menu it was reached from
  useEffect(() => {
    if (ref.current !== null) ref.current.open = false
  }, [key])

  useEffect(() => {
    function onPointer(event: PointerEvent) {
      const details = ref.current
      if (details?.open && event.target instanceof Node && !details.contains(event.target))
        details.open = false
    }
    function onKey(event: KeyboardEvent) {
      const details = ref.current
      if (event.key !== 'Escape' || !details?.open) return
      details.open = false
      details.querySelector('summary')?.focus()
    }
    document.addEventListener('pointerdown', onPointer)
    document.addEventListener('keydown', onKey)
    return () => {
      document.removeEventListener('pointerdown', onPointer)
      document.removeEventListener('keydown', onKey)
    }
  }, [])

  return (
    <details ref={ref} className="group relative">
      <summary className="flex min-h-8 list-none items-center gap-1.5 rounded-md border bg-sheet px-2.5 text-ink pointer-coarse:min-h-11 [&::-webkit-details-marker]:hidden">
        {label}
        {note !== undefined && (
          <span title={note} className="size-2 rounded-full bg-warn">
            <span className="sr-only">, {note}</span>
          </span>
        )}
        <svg
          viewBox="0 0 10 6"
          width="10"
          height="6"
          fill="none"
          aria-hidden="true"
          className="group-open:rotate-180"
        >
          <path d="M1 1l4 4 4-4" stroke="currentColor" strokeWidth="1.6" />
        </svg>
      </summary>
      <div className="absolute right-0 z-20 mt-1 min-w-52 rounded-md border bg-sheet p-1.5 shadow-lg">
        {children}
      </div>
    </details>
  )
}
