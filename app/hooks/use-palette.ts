/** The theme's colours for what is drawn on a canvas, where style sheets do not reach. */
import { useEffect, useState } from 'react'
import { flushSync } from 'react-dom'

const TOKENS = {
  ink: 'ink',
  ink2: 'ink-2',
  ink3: 'ink-3',
  rule: 'rule',
  rule2: 'rule-2',
  sheet: 'sheet',
  vac: 'vac',
  vacSoft: 'vac-soft',
} as const

export type Palette = Record<keyof typeof TOKENS, string>

function readPalette(): Palette {
  // A custom property reads back as it was written; only a real colour property is resolved for the theme.
  const probe = document.createElement('span')
  document.body.append(probe)
  const read = Object.entries(TOKENS).map(([name, token]) => {
    probe.style.color = `var(--color-${token})`
    return [name, getComputedStyle(probe).color] as const
  })
  probe.remove()
  return Object.fromEntries(read) as Palette
}

/** The colours in force, read again when the theme changes and for paper; null until the page has come alive. */
export function usePalette(): Palette | null {
  const [palette, setPalette] = useState<Palette | null>(null)
  useEffect(() => {
    const root = document.documentElement
    const read = () => setPalette(readPalette())
    // Paper is white whatever the screen is, and the browser takes its picture right after this event.
    const forPaper = () => {
      root.style.colorScheme = 'light'
      flushSync(read)
    }
    const forScreen = () => {
      root.style.removeProperty('color-scheme')
      read()
    }
    read()
    const media = matchMedia('(prefers-color-scheme: dark)')
    const observer = new MutationObserver(read)
    observer.observe(root, { attributeFilter: ['data-theme'] })
    media.addEventListener('change', read)
    addEventListener('beforeprint', forPaper)
    addEventListener('afterprint', forScreen)
    return () => {
      observer.disconnect()
      media.removeEventListener('change', read)
      removeEventListener('beforeprint', forPaper)
      removeEventListener('afterprint', forScreen)
    }
  }, [])
  return palette
}
