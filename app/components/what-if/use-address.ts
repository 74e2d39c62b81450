import { useEffect, useRef } from 'react'

/** The address follows once the hand has been still for so long, ms: browsers take ill to a flood of changes. */
const ADDRESS_AFTER_MS = 250

/**
 * Writes a trial into the address line once the hand has let go and been still for a while. Past the router, which
 * would ask the server for the page anew.
 */
export function useAddress(path: string, address: string): void {
  const held = useRef(false)
  useEffect(() => {
    let timer: ReturnType<typeof setTimeout> | undefined
    const write = () => {
      if (location.pathname + location.search === address || location.pathname !== path) return
      history.replaceState(history.state, '', address)
    }
    const later = () => {
      clearTimeout(timer)
      if (!held.current) timer = setTimeout(write, ADDRESS_AFTER_MS)
    }
    const take = () => {
      held.current = true
      clearTimeout(timer)
    }
    const leave = () => {
      held.current = false
      later()
    }
    later()
    addEventListener('pointerdown', take)
    addEventListener('pointerup', leave)
    addEventListener('pointercancel', leave)
    return () => {
      clearTimeout(timer)
      removeEventListener('pointerdown', take)
      removeEventListener('pointerup', leave)
      removeEventListener('pointercancel', leave)
    }
  }, [path, address])
}
