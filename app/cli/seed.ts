/** Fills an empty database with the demo: `npx tsx app/cli/seed.ts`. */
import { seedDemo } from '#seeds/demo.ts'
import { closeDb, getDb, getPool } from '../db/client.server.ts'

/** The database's own words: what wraps them repeats the whole statement. */
function whyNot(error: unknown): string {
  if (!(error instanceof Error)) return String(error)
  return error.cause instanceof Error ? whyNot(error.cause) : error.message
}

try {
  await seedDemo(getDb(), getPool(), { log: (line) => console.log(line) })
} catch (error) {
  console.error(`The demo could not be filled in: ${whyNot(error)}`)
  process.exitCode = 1
} finally {
  await closeDb()
}
