/** The whole map of addresses. Explicit, so that it can be read on one page. */
import { index, layout, type RouteConfig, route } from '@react-router/dev/routes'

export default [
  route('sign-in', 'routes/public/sign-in.tsx'),
  route('sign-out', 'routes/public/sign-out.tsx'),
  route('health', 'routes/public/health.tsx'),

  layout('routes/layout.tsx', [
    index('routes/line/line.tsx'),
    route('account', 'routes/account/account.tsx'),
  ]),

  // Anything else: the plain 404 page, from a route of its own so that middleware and matrix cover it.
  route('*', 'routes/public/not-found.tsx'),
] satisfies RouteConfig
