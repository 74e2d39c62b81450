/** `npm start` as a whole, in a copy of the project: comes up, goes down, survives kill -9, and says what is in its way. */
import { type ChildProcess, spawn } from 'node:child_process'
import { cpSync, existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, symlinkSync } from 'node:fs'
import { createServer } from 'node:net'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import { afterAll, afterEach, beforeAll, describe, expect, test } from 'vitest'

const COPIED = [
  'app',
  'build',
  'drizzle',
  'seeds',
  'public',
  'package.json',
  'package-lock.json',
  'tsconfig.json',
  'vite.config.ts',
  'react-router.config.ts',
]
const STARTS_WITHIN_MS = 90_000

let folder: string
const begun: Start[] = []

interface Start {
  child: ChildProcess
  output(): string
  ended: Promise<number | null>
}

beforeAll(() => {
  if (!existsSync('build/.sources')) throw new Error('There is no build: run npm test -- build routes.')
  folder = mkdtempSync(join(tmpdir(), 'ebbline-start-'))
  for (const name of COPIED) if (existsSync(name)) cpSync(name, join(folder, name), { recursive: true })
  symlinkSync(join(process.cwd(), 'node_modules'), join(folder, 'node_modules'))
})
afterEach(async () => {
  for (const { child, ended } of begun.splice(0)) {
    if (child.exitCode === null && child.signalCode === null) child.kill('SIGTERM')
    await ended
  }
})
afterAll(() => {
  rmSync(databaseFolder(), { recursive: true, force: true })
  rmSync(folder, { recursive: true })
})

/** The copy is closed to other users, so for root the database's files are under /var/lib; otherwise in data/. */
function databaseFolder(): string {
  const noted = join(folder, 'data', 'database-folder')
  const place = existsSync(noted) ? readFileSync(noted, 'utf8').trim() : 'mariadb'
  return resolve(folder, 'data', place)
}

function start(env: Record<string, string> = {}): Start {
  const clean: NodeJS.ProcessEnv = { ...process.env, PORT: '0', DEMO: '0', ...env }
  for (const key of ['DATABASE_URL', 'SESSION_SECRET', 'LOG_LEVEL', 'NODE_ENV', 'VITEST']) {
    if (!(key in env)) delete clean[key]
  }
  const child = spawn(process.execPath, ['app/cli/start.mjs'], { cwd: folder, env: clean })
  let written = ''
  const note = (chunk: Buffer) => {
    written += chunk.toString('utf8')
  }
  child.stdout.on('data', note)
  child.stderr.on('data', note)
  const ended = new Promise<number | null>((resolve) => child.on('close', (code) => resolve(code)))
  const begin = { child, output: () => written, ended }
  begun.push(begin)
  return begin
}

async function ready({ child, output }: Start): Promise<string> {
  const giveUpAt = performance.now() + STARTS_WITHIN_MS
  for (;;) {
    const address = /Ebbline is ready: (\S+)/.exec(output())?.[1]
    if (address !== undefined) return address
    if (child.exitCode !== null || performance.now() > giveUpAt)
      throw new Error(`It did not come up:\n${output()}`)
    await pause(50)
  }
}

/** Command lines of all processes that have to do with the copy. */
function processes(): string[] {
  return readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .map(commandLine)
    .filter((line) => line.includes(folder) || line.includes(databaseFolder()))
}

function commandLine(pid: string): string {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, 'utf8').replaceAll('\0', ' ')
  } catch {
    // It ended while the list was read.
    return ''
  }
}

function childNamed(name: string): number {
  const { children } = JSON.parse(readFileSync(join(folder, 'data', 'running.json'), 'utf8'))
  return children.find((child: { name: string }) => child.name === name).pid
}

function pause(ms: number): Promise<void> {
  return new Promise((resolve) => setTimeout(resolve, ms))
}

describe('npm start', () => {
  test('comes up on its own database, refuses a second start, and ends on SIGINT and SIGTERM at once', async () => {
    const first = start()
    const address = await ready(first)
    expect((await fetch(`${address}/health`)).status).toBe(200)
    expect(processes().some((line) => /mariadbd .*--bind-address=127\.0\.0\.1/.test(line))).toBe(true)

    const second = start()
    expect(await second.ended).toBe(1)
    expect(second.output()).toContain(`already running from this folder at ${address}`)
    expect((await fetch(`${address}/health`)).status).toBe(200)

    const began = performance.now()
    first.child.kill('SIGINT')
    first.child.kill('SIGTERM')
    expect(await first.ended).toBe(0)
    expect(performance.now() - began).toBeLessThan(10_000)
    expect(processes()).toEqual([])
  }, 180_000)

  test('recovers after kill -9, and ends with a sentence when one of its processes dies', async () => {
    const killed = start()
    await ready(killed)
    killed.child.kill('SIGKILL')
    await killed.ended

    const next = start()
    const address = await ready(next)
    expect((await fetch(`${address}/health`)).status).toBe(200)

    process.kill(childNamed('worker'), 'SIGKILL')
    expect(await next.ended).toBe(1)
    expect(next.output()).toContain('The worker ended by itself.')
    expect(processes()).toEqual([])
  }, 180_000)

  test('a stop in the middle of the start leaves nothing either', async () => {
    const begin = start()
    while (!existsSync(join(folder, 'data', 'running.json'))) await pause(20)
    await pause(700)
    begin.child.kill('SIGTERM')
    expect(await begin.ended).toBe(130)
    expect(processes()).toEqual([])
  }, 60_000)
})

describe('what is in the way', () => {
  test('a port in use', async () => {
    const other = createServer()
    const port = await new Promise<number>((resolve) => {
      other.listen(0, '127.0.0.1', () => resolve((other.address() as { port: number }).port))
    })
    const refused = start({ PORT: String(port) })
    expect(await refused.ended).toBe(1)
    expect(refused.output().trim()).toBe(
      `Port ${port} on 127.0.0.1 is in use by another program. Stop it, or take another port: PORT=${port + 1} npm start`,
    )
    other.close()
  }, 30_000)

  test('no database behind DATABASE_URL', async () => {
    const refused = start({ DATABASE_URL: 'mysql://a:b@127.0.0.1:1/ebbline' })
    expect(await refused.ended).toBe(1)
    expect(refused.output()).toContain('No database server answers on 127.0.0.1:1 (ECONNREFUSED).')
    expect(processes()).toEqual([])
  }, 60_000)

  test('a port that is no number', async () => {
    const refused = start({ PORT: 'web' })
    expect(await refused.ended).toBe(1)
    expect(refused.output().trim()).toBe('PORT is "web"; expected a whole number from 0 to 65535.')
  }, 30_000)
})
