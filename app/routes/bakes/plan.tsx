import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PlanPage } from '#app/components/bakes/plan-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { PlanActSchema } from '#app/domain/bake-plan-form.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import {
  movePlanOn,
  setPlanPriority,
  signPlanReady,
  tickPlanStep,
  withdrawPlan,
} from '#app/services/bake-plans.server.ts'
import { readPlanPage } from '#app/services/bake-plans-page.server.ts'
import type { Route } from './+types/plan'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData?.title ?? 'Bake plan'} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return orRefuse(readPlanPage(getDb(), actor, nowOf(context), Number(params.planId)))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  // Each act asks for its own permission in the service; whoever looks may press.
  const actor = permitted(context, request, 'facility:view')
  const typed = typedOf(await request.formData())
  const planId = Number(params.planId)
  const here = `/bakes/plans/${planId}`
  const now = nowOf(context)
  try {
    const act = parseValues(PlanActSchema, typed)
    if (act.act === 'sign') {
      await signPlanReady(getDb(), actor, now, planId, act)
      return redirectWithNotice(here, 'Signed as ready. This version is the baseline.')
    }
    if (act.act === 'withdraw') {
      await withdrawPlan(getDb(), actor, now, planId, act)
      return redirectWithNotice(here, 'Withdrawn.')
    }
    if (act.act === 'move-on') {
      await movePlanOn(getDb(), actor, now, planId, act)
      return redirectWithNotice(here, act.to === 'done' ? 'The bake is done.' : 'The bake is under way.')
    }
    if (act.act === 'priority') {
      await setPlanPriority(getDb(), actor, now, planId, act)
      return redirectWithNotice(here, 'Priority set.')
    }
    await tickPlanStep(getDb(), actor, now, planId, { item: act.item, done: act.done, note: act.note })
    return redirectWithNotice(here, act.done ? 'Ticked.' : 'Taken back.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function PlanRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <PlanPage {...loaderData} failure={actionData} />
}
