import { data } from 'react-router'
import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PermitFormPage } from '#app/components/permits/permit-form-page.tsx'
import { actorContext } from '#app/context.ts'
import { getDb } from '#app/db/client.server.ts'
import { postedValues, withRowsChanged } from '#app/domain/permit-form-values.ts'
import { PermitFormBasisSchema } from '#app/domain/schemas/permit-form.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { type PermitFormAnswer, readPermitForm, savePermitForm } from '#app/services/permit-form.server.ts'
import type { Route } from './+types/edit'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Edit ${params.number} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'permit:draft')
  const form = await orRefuse(readPermitForm(getDb(), actor, nowOf(context), params.number))
  return { form, checking: url.searchParams.has('check') }
}

const answered = (answer: PermitFormAnswer, status: number) => data(answer, { status })

export async function action({ context, request, params }: Route.ActionArgs) {
  const posted = await request.formData()
  const typed = typedOf(posted)
  // A page that saves by itself must not be thrown off its text by a session that has ended.
  if (typed.intent === 'autosave' && context.get(actorContext) === null) {
    return answered({ kind: 'signed-out' }, 401)
  }
  const actor = permitted(context, request, 'permit:draft')
  const values = postedValues(posted)
  try {
    const { intent, ...basis } = parseValues(PermitFormBasisSchema, typed)
    const rows = withRowsChanged(values, intent)
    if (rows !== null) return answered({ kind: 'rows', values: rows, ...basis }, 200)
    const answer = await savePermitForm(getDb(), actor, nowOf(context), params.number, { values, ...basis })
    if (answer.kind === 'changed') return answered(answer, 409)
    if (answer.kind === 'refused') return answered(answer, 400)
    if (intent === 'autosave') return answered(answer, 200)
    const here = `/permits/${params.number}`
    if (intent === 'request') return redirectWithNotice(`${here}?act=request#act`, 'Saved.')
    if (answer.kind === 'saved' && answer.state === 'requested') {
      return redirectWithNotice(here, 'The new terms are saved and requested; the approval has ended.')
    }
    return redirectWithNotice(`${here}/edit${intent === 'check' ? '?check=1' : ''}`, 'Saved.')
  } catch (error) {
    return failure(error, {})
  }
}

/** Without a connection the page stays as it is, and what was typed stays in it. */
export async function clientAction({ serverAction }: Route.ClientActionArgs) {
  try {
    const answer = await serverAction()
    // A status of refusal, so that nothing is fetched anew under what was typed.
    return 'kind' in answer && answer.kind !== 'saved' ? data(answer, { status: 422 }) : answer
  } catch (error) {
    if (error instanceof TypeError) return answered({ kind: 'offline' }, 503)
    throw error
  }
}

export default function EditPermitRoute({ loaderData, actionData }: Route.ComponentProps) {
  const answer = actionData !== undefined && 'kind' in actionData ? actionData : undefined
  return <PermitFormPage {...loaderData.form} checking={loaderData.checking} answer={answer} />
}
