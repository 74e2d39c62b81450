/** Makes the database of DATABASE_URL when it is missing and brings its tables up to date. */
import { closeDb, getDb, getPool } from '../db/client.server.ts'
import { migrateDatabase } from '../db/migrate.server.ts'
import { env } from '../env.server.ts'
import { machineNow } from '../machine-time.server.ts'
import { ensureClock } from '../services/clock.server.ts'

/** One sentence for what stands between us and the database. */
function whyNot(error: unknown, databaseUrl: string): string {
  const code = error instanceof Error && 'code' in error ? String(error.code) : ''
  const { hostname, port, username } = new URL(databaseUrl)
  const server = `${hostname}:${port || '3306'}`
  if (['ECONNREFUSED', 'ETIMEDOUT', 'ENOTFOUND', 'EHOSTUNREACH', 'PROTOCOL_CONNECTION_LOST'].includes(code)) {
    return `No database server answers on ${server} (${code}). Start it or correct DATABASE_URL.`
  }
  if (code === 'ER_ACCESS_DENIED_ERROR' || code === 'ER_DBACCESS_DENIED_ERROR') {
    return `The database server on ${server} refuses ${username}. Correct DATABASE_URL or grant the rights.`
  }
  return error instanceof Error ? error.message : String(error)
}

async function main(): Promise<void> {
  const databaseUrl = env().DATABASE_URL
  try {
    const { applied } = await migrateDatabase(databaseUrl)
    // The demo's own clock comes with its data; a real site follows the machine.
    if (!env().DEMO) await ensureClock(getDb(), { demo: false, startAt: machineNow() })
    const [rows] = await getPool().promise().query('SELECT EXISTS(SELECT 1 FROM site) AS filled')
    const filled = Array.isArray(rows) && rows.some((row) => 'filled' in row && row.filled === 1)
    // The start command reads this line. Seeding writes the site's row last, so without one it has to be done (again).
    console.log(JSON.stringify({ applied, empty: !filled }))
  } catch (error) {
    throw new Error(whyNot(error, databaseUrl), { cause: error })
  } finally {
    await closeDb()
  }
}

try {
  await main()
} catch (error) {
  console.error(error instanceof Error ? error.message : String(error))
  process.exitCode = 1
}
