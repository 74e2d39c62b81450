import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { openPermitPhoto } from '#app/services/permit-photos.server.ts'
import type { Route } from './+types/photo'

/** A photo as it came. Always a download, and never taken for anything but what its own bytes showed when it arrived. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const photo = await orRefuse(openPermitPhoto(getDb(), actor, params.number, Number(params.photoId)))
  const { fileName } = photo
  return new Response(photo.body, {
    headers: {
      'Content-Type': photo.contentType,
      'Content-Length': String(photo.byteSize),
      'Content-Disposition': `attachment; filename="${fileName.replace(/[^\w.-]/g, '_')}"; filename*=UTF-8''${encodeURIComponent(fileName)}`,
      'X-Content-Type-Options': 'nosniff',
    },
  })
}
