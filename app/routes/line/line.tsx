import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { LinePage } from '#app/components/line/line-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readLinePage, readTrends } from '#app/services/line-page.server.ts'
import { readSafetyNotices } from '#app/services/safety-notices.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/line'

export function meta() {
  return [{ title: 'Line · Ebbline' }]
}

const DAY_MS = 86_400_000

export async function loader({ context, request, url }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  const now = nowOf(context)
  // Looking back shows what was true then, by what is known today.
  const dayBefore = url.searchParams.get('at') === 'day-before'
  const at = dayBefore ? new Date(now.getTime() - DAY_MS) : now
  const [page, trends, site, safety] = await Promise.all([
    readLinePage(getDb(), at, dayBefore),
    readTrends(getDb(), at),
    getSite(getDb()),
    // What is closed or dangerous now, also for whoever looks back.
    readSafetyNotices(getDb()),
  ])
  const show = url.searchParams.get('show') ?? 'all'
  return { ...page, trends, siteName: site.name, dayBefore, show, safety }
}

export default function Line({ loaderData }: Route.ComponentProps) {
  return <LinePage {...loaderData} />
}
