import { StrictMode, startTransition, useEffect } from 'react'
import { hydrateRoot } from 'react-dom/client'
import { HydratedRouter } from 'react-router/dom'

/** Marks the document once event handlers are in place, for browser tests that would otherwise click too early. */
function MarkHydrated({ children }: { children: React.ReactNode }) {
  useEffect(() => {
    document.documentElement.dataset.hydrated = ''
  }, [])
  return children
}

startTransition(() => {
  hydrateRoot(
    document,
    <StrictMode>
      <MarkHydrated>
        <HydratedRouter />
      </MarkHydrated>
    </StrictMode>,
  )
})
