/** What every page inside the shell may ask for: the site's time zone, the product's time, and the reader's unit. */
import { createContext, useContext } from 'react'
import type { PressureUnit } from '#app/context.ts'

interface SiteFacts {
  zone: string
  /** The product's time when the page was made; ages are counted from it. */
  now: Date
  unit: PressureUnit
}

const SiteContext = createContext<SiteFacts | null>(null)

export const SiteProvider = SiteContext.Provider

/** The facts the shell provides. @throws Error outside the shell: a programming error */
export function useSite(): SiteFacts {
  const site = useContext(SiteContext)
  if (site === null) throw new Error('useSite was called outside the shell')
  return site
}
