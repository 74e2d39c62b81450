/** The web server as a process: reads its settings, listens, and ends in good order when told to. */
import type { AddressInfo } from 'node:net'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import type { ServerBuild } from 'react-router'
import { endWithin, reportReady, untilStopped } from '../cli/until-stopped.ts'
import { closeDb, getDb } from '../db/client.server.ts'
import { env } from '../env.server.ts'
import { log } from '../log.server.ts'
import { keepClockGoing, resumeClockWhenAble } from '../services/clock-keeping.server.ts'
import { listDemoSignIns } from '../services/demo-sign-ins.server.ts'
import { close, createApp, listen } from './http.ts'

/** Requests under way may take so long after the order to end; the start command waits a little longer. */
const GRACE_MS = 3_000
const END_WITHIN_MS = 4_000

async function main(): Promise<void> {
  const told = untilStopped()
  const ending = new AbortController()
  // Not waited for: without a database the server still answers, with a plain error page.
  const clock = tendClock(ending.signal)
  const { HOST, PORT, TRUST_PROXY } = env()
  const folder = join(process.cwd(), 'build')
  const build = (await import(pathToFileURL(join(folder, 'server', 'index.js')).href)) as ServerBuild
  const app = createApp({ build, trustProxy: TRUST_PROXY, clientFolder: join(folder, 'client') })
  const server = await listen(app, { host: HOST, port: PORT })
  const { port } = server.address() as AddressInfo
  log.debug('Web server ready', { host: HOST, port })
  reportReady({ port, signIns: listDemoSignIns() })

  const reason = await told
  log.debug('Web server ends', { reason })
  endWithin(END_WITHIN_MS)
  ending.abort()
  await close(server, GRACE_MS)
  await clock
  await closeDb()
}

/** The worker keeps the clock as well; with either of them running it is never set back. */
async function tendClock(signal: AbortSignal): Promise<void> {
  if (await resumeClockWhenAble(getDb(), signal)) await keepClockGoing(getDb(), signal)
}

/** One sentence for what keeps the server from starting. */
function whyNot(error: unknown): string {
  const place = (key: string) =>
    error instanceof Error && key in error ? String(Reflect.get(error, key)) : '?'
  const code = error instanceof Error && 'code' in error ? error.code : undefined
  if (code === 'EADDRINUSE')
    return `Port ${place('port')} on ${place('address')} is in use by another program. Stop that program or choose another port with PORT.`
  if (code === 'EACCES') return 'The port may not be used by this user. Choose one above 1023 with PORT.'
  if (code === 'EADDRNOTAVAIL') return 'This machine has no such address. Correct HOST.'
  if (code === 'ERR_MODULE_NOT_FOUND')
    return 'The build is missing or incomplete. Run "npm run build", or use "npm start", which builds when needed.'
  return error instanceof Error ? error.message : String(error)
}

try {
  await main()
  process.exit(0)
} catch (error) {
  process.stderr.write(`Web server: ${whyNot(error)}\n`)
  process.exit(1)
}
