import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { CompetencesPage } from '#app/components/people/competences-pages.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { competencesAtOneLook } from '#app/services/competences.server.ts'
import type { Route } from './+types/competences'

export function meta() {
  return [{ title: 'Competences · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const found = await competencesAtOneLook(getDb(), nowOf(context))
  return { ...found, mayEdit: may(actor, 'competence:edit') }
}

export default function CompetencesRoute({ loaderData }: Route.ComponentProps) {
  return <CompetencesPage {...loaderData} />
}
