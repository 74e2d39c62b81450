import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { TestPage } from '#app/components/isolation/test-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { IsolationDecisionSchema } from '#app/domain/schemas/isolation-test.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { decideIsolationTest, readIsolationTest } from '#app/services/isolation-tests.server.ts'
import type { Route } from './+types/isolation-test'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Isolation test ${params.testId} of ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const detail = await orRefuse(
    readIsolationTest(getDb(), actor, nowOf(context), params.tag, Number(params.testId)),
  )
  return { ...detail, mayDecide: may(actor, 'isolation-test:accept') }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'isolation-test:accept')
  const typed = typedOf(await request.formData())
  try {
    const decision = parseValues(IsolationDecisionSchema, typed)
    const { tag, testId } = params
    await decideIsolationTest(getDb(), actor, nowOf(context), tag, Number(testId), decision)
    const done = decision.intent === 'accept' ? 'Test accepted and signed.' : 'Test voided and signed.'
    return redirectWithNotice(`/segments/${tag}/isolation-tests/${testId}`, done)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function IsolationTestRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <TestPage {...loaderData} failure={actionData} />
}
