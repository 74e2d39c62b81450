import {
  isRouteErrorResponse,
  Links,
  Meta,
  Outlet,
  Scripts,
  ScrollRestoration,
  useRouteLoaderData,
} from 'react-router'
import type { Route } from './+types/root'
import './app.css'
import { identifyRequest, secureResponse } from './auth/middleware.server.ts'
import { ErrorPage } from './components/ui/error-page.tsx'
import { preferencesContext } from './context.ts'

export const middleware: Route.MiddlewareFunction[] = [identifyRequest, secureResponse]

export function loader({ context }: Route.LoaderArgs) {
  return { theme: context.get(preferencesContext).theme }
}

export function meta(): Route.MetaDescriptors {
  return [{ title: 'Ebbline' }]
}

export function Layout({ children }: { children: React.ReactNode }) {
  const theme = useRouteLoaderData<typeof loader>('root')?.theme ?? 'system'
  return (
    <html lang="en" data-theme={theme}>
      <head>
        <meta charSet="utf-8" />
        <meta name="viewport" content="width=device-width, initial-scale=1" />
        <link rel="icon" href="/favicon.svg" type="image/svg+xml" />
        <Meta />
        <Links />
      </head>
      <body>
        {children}
        <ScrollRestoration />
        <Scripts />
      </body>
    </html>
  )
}

export default function Root() {
  return <Outlet />
}

export function ErrorBoundary({ error }: Route.ErrorBoundaryProps) {
  if (isRouteErrorResponse(error)) {
    const body: unknown = error.data
    const message =
      typeof body === 'object' && body !== null && 'message' in body ? String(body.message) : undefined
    return <ErrorPage status={error.status} message={message} />
  }
  return <ErrorPage status={500} />
}
