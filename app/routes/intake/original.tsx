import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { originalFile } from '#app/services/intake-pages.server.ts'
import type { Route } from './+types/original'

/** The bytes of a received file as they came. Always a download: what came from outside is never shown as a page. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const { fileName, byteSize, body } = await orRefuse(originalFile(getDb(), actor, Number(params.importId)))
  return new Response(body, {
    headers: {
      'Content-Type': 'application/octet-stream',
      'Content-Length': String(byteSize),
      'Content-Disposition': `attachment; filename="${fileName.replace(/[^\w.-]/g, '_')}"; filename*=UTF-8''${encodeURIComponent(fileName)}`,
    },
  })
}
