import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readPermitPdf } from '#app/services/permit-paper.server.ts'
import type { Route } from './+types/permit-pdf'
import { printOrigin } from './print-origin.server.ts'

/** The sheets of a permit as a PDF file. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const { number } = params
  const file = await orRefuse(readPermitPdf(getDb(), actor, nowOf(context), number, printOrigin(request)))
  return new Response(new Uint8Array(file), {
    headers: {
      'Content-Type': 'application/pdf',
      'Content-Disposition': `inline; filename="${number}.pdf"`,
    },
  })
}
