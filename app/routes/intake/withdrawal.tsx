import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { WithdrawalPage } from '#app/components/intake/withdrawal-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { ImportWithdrawalSchema } from '#app/domain/schemas/import-withdrawal.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import {
  agreeWithdrawal,
  askWithdrawal,
  readWithdrawalPage,
  refuseWithdrawal,
  withdrawImport,
} from '#app/services/intake-withdrawal.server.ts'
import type { Route } from './+types/withdrawal'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Withdraw import ${params.importId} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return orRefuse(readWithdrawalPage(getDb(), actor, Number(params.importId)))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'intake:ask-withdrawal')
  const importId = Number(params.importId)
  const here = `/intake/${importId}/withdrawal`
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  try {
    const part = parseValues(ImportWithdrawalSchema, typed)
    if (part.intent === 'ask') {
      await askWithdrawal(getDb(), actor, now, importId, part.reason)
      return redirectWithNotice(here, 'Asked for. An engineer has to agree.')
    }
    if (part.intent === 'agree') {
      await agreeWithdrawal(getDb(), actor, now, importId)
      return redirectWithNotice(here, 'Agreed. An administrator can withdraw the import now.')
    }
    if (part.intent === 'refuse') {
      await refuseWithdrawal(getDb(), actor, now, importId, part.refusal)
      return redirectWithNotice(here, 'Turned down. The import stays as it is.')
    }
    const done = await withdrawImport(getDb(), actor, now, importId)
    const kept = done.restored === 0 ? '' : `; ${done.restored} stay, because another file brought them too`
    return redirectWithNotice(here, `${done.withdrawn} readings withdrawn${kept}.`)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function WithdrawalRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <WithdrawalPage {...loaderData} failure={actionData} />
}
