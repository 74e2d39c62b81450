/** The worker as a process: runs the jobs until told to end. */
import { endWithin, reportReady, untilStopped } from '../cli/until-stopped.ts'
import { closeDb } from '../db/client.server.ts'
import { log } from '../log.server.ts'
import { runWorker } from './loop.server.ts'

/** A job under way may take so long after the order to end; what is not done then is taken up after its lease. */
const END_WITHIN_MS = 4_000

async function main(): Promise<void> {
  const stopping = new AbortController()
  void untilStopped().then((reason) => {
    log.debug('Worker ends', { reason })
    endWithin(END_WITHIN_MS)
    stopping.abort()
  })
  const work = runWorker({ signal: stopping.signal })
  reportReady()
  await work
  await closeDb()
}

try {
  await main()
  process.exit(0)
} catch (error) {
  process.stderr.write(`Worker: ${error instanceof Error ? error.message : String(error)}\n`)
  process.exit(1)
}
