/** The whole map of addresses. Explicit, so that it can be read on one page. */
import { index, layout, type RouteConfig, route } from '@react-router/dev/routes'

export default [
  route('sign-in', 'routes/public/sign-in.tsx'),
  route('sign-out', 'routes/public/sign-out.tsx'),
  route('health', 'routes/public/health.tsx'),

  layout('routes/layout.tsx', [
    index('routes/line/line.tsx'),
    route('segments/:tag', 'routes/segments/segment.tsx'),
    route('segments/:tag/state', 'routes/segments/state.tsx'),
    route('segments/:tag/typed-reading', 'routes/segments/typed-reading.tsx'),
    route('segments/:tag/isolation-tests/new', 'routes/segments/isolation-test-new.tsx'),
    route('segments/:tag/isolation-tests/:testId', 'routes/segments/isolation-test.tsx'),
    route('forecasts', 'routes/forecasts/forecasts.tsx'),
    route('forecasts/:tag', 'routes/forecasts/segment.tsx'),
    route('forecasts/:tag/what-if', 'routes/forecasts/what-if.tsx'),
    route('intake', 'routes/intake/intake.tsx'),
    route('intake/:importId', 'routes/intake/import.tsx'),
    route('intake/:importId/withdrawal', 'routes/intake/withdrawal.tsx'),
    route('bakes', 'routes/bakes/bakes.tsx'),
    route('bakes/options', 'routes/bakes/options.tsx'),
    route('bakes/plans/new', 'routes/bakes/new-plan.tsx'),
    route('bakes/plans/:planId', 'routes/bakes/plan.tsx'),
    route('bakes/runs/:tag', 'routes/bakes/run.tsx'),
    route('logbook', 'routes/logbook/logbook.tsx'),
    route('logbook/new', 'routes/logbook/new-entry.tsx'),
    route('logbook/:entryId', 'routes/logbook/entry.tsx'),
    route('register', 'routes/register/register.tsx'),
    route('register/:kind', 'routes/register/list.tsx'),
    route('register/:kind/new', 'routes/register/new.tsx'),
    route('register/:kind/:key', 'routes/register/detail.tsx'),
    route('people', 'routes/people/people.tsx'),
    route('people/new', 'routes/people/new-person.tsx'),
    route('people/waiting', 'routes/people/waiting.tsx'),
    route('people/record', 'routes/people/record.tsx'),
    route('people/tokens', 'routes/api/tokens.tsx'),
    route('people/:personId', 'routes/people/person.tsx'),
    route('account', 'routes/account/account.tsx'),
    route('clock', 'routes/account/clock.tsx'),
  ]),

  // Resource routes: no page of their own.
  route('segments/:tag/readings.csv', 'routes/segments/readings-csv.tsx'),
  route('bakes/plans/:planId/plan.csv', 'routes/bakes/plan-csv.tsx'),
  route('bakes/plans/:planId/plan.ics', 'routes/bakes/plan-ics.tsx'),
  route('api/v1/openapi.json', 'routes/api/openapi.tsx'),
  route('api/v1/sources/:code/readings', 'routes/api/readings.tsx'),
  route('api/v1/sources/:code/files/:name', 'routes/api/files.tsx'),
  route('intake/upload', 'routes/intake/upload.tsx'),
  route('intake/:importId/original', 'routes/intake/original.tsx'),
  route('intake/:importId/rejected.csv', 'routes/intake/rejected-csv.tsx'),

  // Anything else: the plain 404 page, from a route of its own so that middleware and matrix cover it.
  route('*', 'routes/public/not-found.tsx'),
] satisfies RouteConfig
