import { useSyncExternalStore } from 'react'

function follow(changed: () => void): () => void {
  window.addEventListener('online', changed)
  window.addEventListener('offline', changed)
  return () => {
    window.removeEventListener('online', changed)
    window.removeEventListener('offline', changed)
  }
}

/** Whether the device says that it has a network. On the server, and without script, nothing speaks against it. */
export function useOnline(): boolean {
  return useSyncExternalStore(
    follow,
    () => navigator.onLine,
    () => true,
  )
}
