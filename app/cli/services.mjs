/** The product's own processes: mail fake, worker, web server. Each runs TypeScript through tsx, without a shell. */
import { join } from 'node:path'
import { CommandFailure, sentenceForFullDisk, speaksOfFullDisk } from './failure.mjs'
import { start } from './processes.mjs'

const READY_WITHIN_MS = 60_000
const HEALTHY_WITHIN_MS = 20_000

const WORKER = 'app/worker/main.ts'
/**
 * The worker reads files of any size, of which next to nothing outlives a line. With the usual 16 MiB for young objects
 * the engine lets its memory grow to twice of what this needs, and gains no speed by it.
 */
const WORKER_FLAGS = ['--max-semi-space-size=2', '--max-old-space-size=512']

/**
 * @typedef {ReturnType<typeof start> & { name: string }} Service
 */

/**
 * How one of our TypeScript programs is run.
 * @param {string} file relative to the project
 */
export function typescript(file) {
  const flags = file.replaceAll('\\', '/').endsWith(WORKER) ? WORKER_FLAGS : []
  return { command: process.execPath, args: [...flags, '--import', 'tsx', file] }
}

/**
 * Starts a process and waits until it says that it is ready. What it writes is passed on line by line.
 * @param {string} name
 * @param {{ root: string, file: string, args?: string[], env: NodeJS.ProcessEnv, started: (service: Service) => void }} options
 *   started: called at once, so that the caller can stop it from then on
 * @returns {Promise<Record<string, unknown>>} what it said about itself
 */
export async function startService(name, { root, file, args = [], env, started }) {
  const { command, args: before } = typescript(join(root, file))
  const program = start(command, [...before, ...args], {
    cwd: root,
    env,
    channel: true,
    onText: (text) => process.stdout.write(text),
  })
  started({ ...program, name })
  /** @type {Promise<Record<string, unknown>>} */
  const ready = new Promise((resolve) => {
    program.child.on('message', (message) => {
      if (typeof message === 'object' && message !== null && 'ready' in message) resolve({ ...message })
    })
  })
  const ended = program.ended.then(() => {
    throw new CommandFailure(whyItEnded(name, program.lastLines()), { lines: [] })
  })
  const late = new Promise((_, reject) => {
    const sentence = `The ${name} did not come up within ${READY_WITHIN_MS / 1000} s.`
    setTimeout(
      () => reject(new CommandFailure(sentence, { lines: program.lastLines() })),
      READY_WITHIN_MS,
    ).unref()
  })
  return /** @type {Record<string, unknown>} */ (await Promise.race([ready, ended, late]))
}

/**
 * Resolves when the web server, and the database behind it, answer.
 * @param {string} address
 */
export async function healthy(address) {
  const giveUpAt = performance.now() + HEALTHY_WITHIN_MS
  let found = 'no answer'
  while (performance.now() < giveUpAt) {
    try {
      const response = await fetch(`${address}/health`, { signal: AbortSignal.timeout(5_000) })
      if (response.ok) return
      found = `status ${response.status}`
    } catch (error) {
      found = error instanceof Error ? error.message : String(error)
    }
    await new Promise((resolve) => setTimeout(resolve, 250))
  }
  throw new CommandFailure(`The web server does not answer on ${address}/health (${found}).`)
}

/**
 * @param {string} name
 * @param {string[]} lines
 */
export function whyItEnded(name, lines) {
  if (speaksOfFullDisk(lines.join('\n'))) return sentenceForFullDisk('the database or the project')
  const last = lines.filter((line) => line.trim() !== '').slice(-8)
  return last.length === 0
    ? `The ${name} ended by itself.`
    : `The ${name} ended by itself. Its last words:\n${last.join('\n')}`
}
