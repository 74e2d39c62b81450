/** A worker of its own that does one job of the intake and dies when it is told to: for tests that kill it. */
import { closeDb, getDb } from '#app/db/client.server.ts'
import { claimJob, runJob } from '#app/services/jobs.server.ts'
import { JOB_HANDLERS } from '#app/worker/jobs/handlers.server.ts'

const db = getDb()
const held = await claimJob(db)
if (held === null) throw new Error('There was no job to do.')
process.stdout.write(`begun ${held.kind}\n`)
const outcome = await runJob(db, held, JOB_HANDLERS, { signal: new AbortController().signal })
process.stdout.write(`ended ${outcome}\n`)
await closeDb()
