/** A path on this site to go on to after signing in; anything that could lead elsewhere becomes the first page. */
export function safePath(next: string | null): string {
  if (next === null || !next.startsWith('/') || next.startsWith('//') || next.includes('\\')) return '/'
  try {
    const url = new URL(next, 'http://here.invalid')
    return url.host === 'here.invalid' ? url.pathname + url.search : '/'
  } catch {
    return '/'
  }
}
