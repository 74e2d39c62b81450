import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PermitPrintPage } from '#app/components/permits/print-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readPermitPaper } from '#app/services/permit-paper.server.ts'
import type { Route } from './+types/print'
import { printOrigin } from './print-origin.server.ts'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Sheets of ${params.number} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return {
    paper: await orRefuse(
      readPermitPaper(getDb(), actor, nowOf(context), params.number, printOrigin(request)),
    ),
  }
}

export default function PermitPrintRoute({ loaderData }: Route.ComponentProps) {
  return <PermitPrintPage {...loaderData} />
}
