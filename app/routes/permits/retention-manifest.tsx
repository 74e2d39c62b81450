import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { exportRun, readManifest } from '#app/services/retention.server.ts'
import type { Route } from './+types/retention-manifest'

/** The manifest of a deletion, or with ?with=content the permits on it as far as they are still there. */
export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const id = Number(params.runId)
  const run = await orRefuse(readManifest(getDb(), actor, id))
  const whole = url.searchParams.get('with') === 'content'
  const { askedByName: askedBy, askedAt, agreedByName: agreedBy, agreedAt, doneAt, calledOffAt } = run
  const head = { run: id, askedBy, askedAt, agreedBy, agreedAt, doneAt, calledOffAt }
  const body = whole
    ? { ...head, permits: await orRefuse(exportRun(getDb(), actor, id)) }
    : { ...head, ...run.manifest }
  return new Response(`${JSON.stringify(body, null, 2)}\n`, {
    headers: {
      'Content-Type': 'application/json; charset=utf-8',
      'Content-Disposition': `attachment; filename="retention-run-${id}${whole ? '-content' : ''}.json"`,
      'X-Content-Type-Options': 'nosniff',
      'Cache-Control': 'private, no-store',
    },
  })
}
