import { getDb } from '#app/db/client.server.ts'
import { isHealthy } from '#app/services/health.server.ts'

/** For the start command and for monitoring: 200 when web server and database both answer. */
export async function loader() {
  const healthy = await isHealthy(getDb())
  return Response.json({ healthy }, { status: healthy ? 200 : 503 })
}
