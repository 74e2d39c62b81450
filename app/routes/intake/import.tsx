import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { ImportPage } from '#app/components/intake/import-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { ImportDecisionSchema, sentAnswers } from '#app/domain/schemas/import-decision.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { acceptNowOrLater, answerQuestions, discardImport } from '#app/services/intake-decisions.server.ts'
import { readImportPage } from '#app/services/intake-pages.server.ts'
import type { Route } from './+types/import'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Import ${params.importId} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return orRefuse(readImportPage(getDb(), actor, Number(params.importId)))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'intake:take-in')
  const importId = Number(params.importId)
  const typed = typedOf(await request.formData())
  try {
    const decision = parseValues(ImportDecisionSchema, typed)
    if (decision.intent === 'accept') {
      const accepted = await acceptNowOrLater(getDb(), actor, nowOf(context), importId)
      if (accepted === null)
        return redirectWithNotice(
          `/intake/${importId}`,
          'The worker takes the file in; this page shows when it has.',
        )
      const { stored, held, conflicting } = accepted
      const beside = conflicting === 0 ? '' : `, ${conflicting} of them beside a different reading`
      return redirectWithNotice(
        `/intake/${importId}`,
        `${stored} readings taken in${beside}; ${held} were held already.`,
      )
    }
    if (decision.intent === 'discard') {
      await discardImport(getDb(), actor, nowOf(context), importId, decision.reason)
      return redirectWithNotice('/intake', `Import ${importId} discarded.`)
    }
    await answerQuestions(getDb(), actor, nowOf(context), importId, sentAnswers(decision))
    return redirectWithNotice(`/intake/${importId}`, 'Read again with the answers.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function ImportRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <ImportPage {...loaderData} failure={actionData} />
}
