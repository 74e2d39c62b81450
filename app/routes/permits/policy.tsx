import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PolicyPage } from '#app/components/permits/policy-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { type Actor, may } from '#app/domain/actor.ts'
import {
  AskRetentionSchema,
  HoldFormSchema,
  PolicyFormSchema,
  RunDecisionSchema,
} from '#app/domain/schemas/permit-policy.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { listPermitPolicies, readPermitPolicy, setPermitPolicy } from '#app/services/permit-policy.server.ts'
import { askRetention, decideRetention, holdPermit, readRetention } from '#app/services/retention.server.ts'
import type { Route } from './+types/policy'

export function meta() {
  return [{ title: 'Permit policy · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const [policy, entries, retention] = await Promise.all([
    readPermitPolicy(getDb()),
    listPermitPolicies(getDb()),
    readRetention(getDb(), actor, nowOf(context)),
  ])
  return {
    policy,
    entries,
    retention,
    maySet: may(actor, 'permit:approve'),
    mayAsk: may(actor, 'retention:ask'),
    mayAgree: may(actor, 'retention:agree'),
    personId: actor.personId,
  }
}

export async function action({ context, request }: Route.ActionArgs) {
  // Each form asks for its own permission in the service.
  const actor = permitted(context, request, 'facility:view')
  const typed = typedOf(await request.formData())
  try {
    return redirectWithNotice('/permits/policy', await doAsked(actor, nowOf(context), typed))
  } catch (error) {
    return failure(error, typed)
  }
}

async function doAsked(actor: Actor, now: Date, typed: Record<string, string>): Promise<string> {
  if (typed.intent === 'set-policy') {
    await setPermitPolicy(getDb(), actor, now, parseValues(PolicyFormSchema, typed))
    return 'Set and signed.'
  }
  if (typed.intent === 'ask-run') {
    const { password } = parseValues(AskRetentionSchema, typed)
    await askRetention(getDb(), actor, now, password)
    return 'Asked for. Somebody else has to agree; nothing has been deleted.'
  }
  if (typed.intent === 'hold' || typed.intent === 'release') {
    const form = parseValues(HoldFormSchema, typed)
    await holdPermit(getDb(), actor, now, form)
    return `${form.number} ${form.intent === 'hold' ? 'is held' : 'is released'}.`
  }
  return decideRetention(getDb(), actor, now, parseValues(RunDecisionSchema, typed))
}

export default function PolicyRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <PolicyPage {...loaderData} failure={actionData} />
}
