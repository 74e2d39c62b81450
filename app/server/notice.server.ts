/** One short sentence carried over a redirect ("Entry written."), shown once by the layout. */
import { createCookie, redirect } from 'react-router'

const cookie = createCookie('ebbline_notice', { httpOnly: true, sameSite: 'lax', path: '/', maxAge: 60 })

/** Redirects and leaves a notice for the next page. */
export async function redirectWithNotice(url: string, notice: string) {
  return redirect(url, { headers: { 'Set-Cookie': await cookie.serialize(notice) } })
}

/** The notice for this request, with the header that clears it. Only the layout's loader reads it. */
export async function takeNotice(request: Request): Promise<{ notice: string | null; clear: string | null }> {
  const notice: unknown = await cookie.parse(request.headers.get('Cookie'))
  if (typeof notice !== 'string' || notice === '') return { notice: null, clear: null }
  return { notice, clear: await cookie.serialize('', { maxAge: 0 }) }
}
