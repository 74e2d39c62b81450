import { nowOf, permitted, signedIn } from '#app/auth/guard.server.ts'
import { CompetencePersonPage } from '#app/components/people/competences-pages.tsx'
import { PersonPage } from '#app/components/people/person-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { changeCompetence, competencePage, competencesOf } from '#app/services/competences.server.ts'
import { readPerson } from '#app/services/people.server.ts'
import { changePerson } from '#app/services/people-change.server.ts'
import { refused } from '../register/refused.server.ts'
import type { Route } from './+types/person'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData?.page.person.name ?? 'People'} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const id = Number(params.personId)
  // An officer enters competences and sees nothing of accounts and roles.
  if (!may(signedIn(context, request), 'people:view')) {
    const actor = permitted(context, request, 'competence:edit')
    const page = await orRefuse(competencePage(getDb(), actor, id))
    return { kind: 'competences' as const, page, own: id === actor.personId }
  }
  const actor = permitted(context, request, 'people:view')
  const person = await orRefuse(readPerson(getDb(), actor, id, nowOf(context)))
  const page = { ...person, competences: await competencesOf(getDb(), id) }
  return { kind: 'account' as const, page, own: id === actor.personId }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const typed = typedOf(await request.formData())
  const id = Number(params.personId)
  const aboutCompetence = typed.intent?.startsWith('competence-') === true
  const actor = permitted(context, request, aboutCompetence ? 'competence:edit' : 'people:edit')
  const change = aboutCompetence ? changeCompetence : changePerson
  try {
    const said = await change(getDb(), actor, nowOf(context), id, typed, parseValues)
    return redirectWithNotice(`/people/${params.personId}`, said)
  } catch (error) {
    return refused(error, typed)
  }
}

export default function PersonRoute({ loaderData, actionData }: Route.ComponentProps) {
  const { kind, page, own } = loaderData
  if (kind === 'competences') return <CompetencePersonPage {...page} own={own} failure={actionData} />
  return <PersonPage {...page} own={own} failure={actionData} />
}
