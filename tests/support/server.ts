/** The whole product for browser tests: a demo database, mail fake, worker and web server, on free ports. */
import { type ChildProcess, spawn } from 'node:child_process'
import { type MailFake, startMailFake } from '#app/mail/fake.ts'
import { demoDatabase } from './demo-database.ts'

const READY_WITHIN_MS = 60_000
const ENDS_WITHIN_MS = 8_000

export interface TestServer {
  /** Address of the web server, without a slash at the end. */
  url: string
  /** Address of the mail fake, for `readMail`. */
  mailUrl: string
  databaseUrl: string
  /** What the processes have written so far. */
  log(): string
  stop(): Promise<void>
}

export interface TestServerOptions {
  /** Name of the database, made anew: one a test file. */
  database: string
  /** Settings beside the usual ones. */
  env?: Record<string, string>
  worker?: boolean
}

/** Starts everything against the built code (`npm run build`, or `npm test`, makes it) and waits until it answers. */
export async function startTestServer({
  database,
  env: extra = {},
  worker = true,
}: TestServerOptions): Promise<TestServer> {
  const databaseUrl = await demoDatabase(database)
  const mail = await startMailFake()
  const env = {
    ...process.env,
    NODE_ENV: 'production',
    DATABASE_URL: databaseUrl,
    SESSION_SECRET: 'a secret for tests only, 32 or more',
    HOST: '127.0.0.1',
    PORT: '0',
    DEMO: '1',
    SMTP_URL: mail.smtpUrl,
    MAIL_FAKE_URL: mail.httpUrl,
    LOG_LEVEL: 'warn',
    ...extra,
  }
  let written = ''
  const note = (text: string) => {
    written += text
  }
  const children: ChildProcess[] = []
  const stop = () => stopAll(children, mail)
  try {
    if (worker) children.push(launch('app/worker/main.ts', env, note))
    const web = launch('app/server/main.ts', env, note)
    children.push(web)
    const facts = await Promise.all(children.map((child) => ready(child, () => written)))
    const url = `http://127.0.0.1:${String(facts.at(-1)?.port)}`
    return { url, mailUrl: mail.httpUrl, databaseUrl, log: () => written, stop }
  } catch (error) {
    await stop()
    throw error
  }
}

function launch(file: string, env: NodeJS.ProcessEnv, note: (text: string) => void): ChildProcess {
  // The channel makes the child end with us, however we end.
  const child = spawn(process.execPath, ['--import', 'tsx', file], {
    env,
    stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
  })
  child.stdout?.on('data', (chunk) => note(String(chunk)))
  child.stderr?.on('data', (chunk) => note(String(chunk)))
  return child
}

function ready(child: ChildProcess, written: () => string): Promise<Record<string, unknown>> {
  return new Promise((resolve, reject) => {
    const late = setTimeout(() => reject(new Error(`Not ready in time.\n${written()}`)), READY_WITHIN_MS)
    child.on('message', (message: Record<string, unknown>) => {
      clearTimeout(late)
      resolve(message)
    })
    child.on('exit', (code) => {
      clearTimeout(late)
      reject(new Error(`${child.spawnargs.at(-1)} ended with ${code}.\n${written()}`))
    })
  })
}

async function stopAll(children: ChildProcess[], mail: MailFake): Promise<void> {
  await Promise.all(children.map(stopOne))
  await mail.stop()
}

function stopOne(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve()
  return new Promise((resolve) => {
    const late = setTimeout(() => child.kill('SIGKILL'), ENDS_WITHIN_MS)
    child.once('exit', () => {
      clearTimeout(late)
      resolve()
    })
    child.kill('SIGTERM')
  })
}
