import { BrandMark } from './brand-mark.tsx'

const HEADINGS: Record<number, string> = {
  400: 'That could not be read',
  401: 'Sign in first',
  403: 'This is not yours to do',
  404: 'Nothing here',
  405: 'That cannot be done here',
  409: 'Somebody was quicker',
  413: 'Too large',
  429: 'Too often',
  503: 'Not ready',
}

const OWN_WORDS =
  'The product made a mistake of its own. Nothing you typed has been saved. The log of the server says more; tell whoever runs it what you were doing and when.'

/** The page for what cannot be shown. It stands alone, because the frame around it may be what failed. */
export function ErrorPage({ status, message }: { status: number; message?: string | undefined }) {
  return (
    <main id="content" className="mx-auto max-w-xl px-4 py-16">
      <p className="mb-8 flex items-center gap-2 text-xl font-semibold tracking-head">
        <BrandMark />
        Ebbline
      </p>
      <p className="text-sm text-ink-3">Error {status}</p>
      <h1 className="mt-1 mb-3">
        {HEADINGS[status] ?? (status >= 500 ? 'Something broke' : 'That did not work')}
      </h1>
      <p className="mb-6">{message ?? (status >= 500 ? OWN_WORDS : 'The page could not be shown.')}</p>
      {/* A plain link: it works even where the script has failed. */}
      <a href="/" className="link">
        To the first page
      </a>
    </main>
  )
}
