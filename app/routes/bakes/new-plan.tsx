import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PlanFormPage } from '#app/components/bakes/plan-form-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { NewVersionSchema, planFormSchema } from '#app/domain/bake-plan-form.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { addPlanVersion, createPlan } from '#app/services/bake-plans.server.ts'
import { readPlanForm } from '#app/services/bake-plans-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/new-plan'

export function meta() {
  return [{ title: 'Bake plan · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  permitted(context, request, 'bake:plan')
  return orRefuse(readPlanForm(getDb(), nowOf(context), url.searchParams))
}

export async function action({ context, request, url }: Route.ActionArgs) {
  const actor = permitted(context, request, 'bake:plan')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  const of = url.searchParams.get('of')
  try {
    const { timeZone } = await getSite(getDb())
    const form = parseValues(planFormSchema(timeZone), typed)
    if (of === null) {
      const id = await createPlan(getDb(), actor, now, form)
      return redirectWithNotice(`/bakes/plans/${id}`, 'Draft made.')
    }
    const basis = parseValues(NewVersionSchema, typed)
    const { version, wasReady } = await addPlanVersion(getDb(), actor, now, Number(of), { ...form, ...basis })
    const words = wasReady ? ' The plan is a draft again and has to be signed anew.' : ''
    return redirectWithNotice(`/bakes/plans/${of}`, `Version ${version} saved.${words}`)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function NewPlanRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <PlanFormPage {...loaderData} failure={actionData} />
}
