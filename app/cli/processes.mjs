/** Starting and ending other programs. Each gets a process group of its own, so that a stop reaches its children too. */
import { spawn } from 'node:child_process'
import { CommandFailure, sentenceForFullDisk, speaksOfFullDisk } from './failure.mjs'

const KEPT_LINES = 30

/** @type {Set<import('node:child_process').ChildProcess>} */
const running = new Set()
let closing = false

/** Whether everything is being ended, so that a program that dies now is no news. */
export function isClosing() {
  return closing
}

/**
 * Starts a program in a process group of its own.
 * @param {string} command
 * @param {string[]} args
 * @param {{ cwd?: string, env?: NodeJS.ProcessEnv, show?: boolean, channel?: boolean, onText?: (text: string) => void }} [options]
 *   show: its output goes to ours; channel: an IPC channel, by whose end the child notices that we are gone;
 *   onText: called with everything it writes
 */
export function start(command, args, { cwd, env, show = false, channel = false, onText } = {}) {
  if (closing) throw new CommandFailure('Stopping: nothing new is started.')
  const output = show ? 'inherit' : 'pipe'
  const child = spawn(command, args, {
    cwd,
    env: env ?? process.env,
    detached: true,
    stdio: channel ? ['ignore', output, output, 'ipc'] : ['ignore', output, output],
  })
  running.add(child)
  /** @type {string[]} */
  const lines = []
  let partial = ''
  const keep = (/** @type {Buffer} */ chunk) => {
    const text = chunk.toString('utf8')
    onText?.(text)
    const parts = (partial + text).split('\n')
    partial = parts.pop() ?? ''
    lines.push(...parts)
    lines.splice(0, Math.max(0, lines.length - KEPT_LINES))
  }
  child.stdout?.on('data', keep)
  child.stderr?.on('data', keep)
  /** @type {Promise<{ code: number | null, signal: NodeJS.Signals | null, error?: Error }>} */
  const ended = new Promise((resolve) => {
    child.on('error', (error) => {
      running.delete(child)
      resolve({ code: null, signal: null, error })
    })
    child.on('close', (code, signal) => {
      running.delete(child)
      resolve({ code, signal })
    })
  })
  return {
    child,
    pid: child.pid,
    ended,
    lastLines: () => (partial === '' ? [...lines] : [...lines, partial]),
  }
}

/**
 * Runs a program to its end; throws a CommandFailure with its last lines when it does not end well.
 * @param {string} command
 * @param {string[]} args
 * @param {{ cwd?: string, env?: NodeJS.ProcessEnv, failure?: string }} [options]
 * @returns {Promise<string>} everything it wrote
 */
export async function run(command, args, { cwd, env, failure } = {}) {
  let all = ''
  const program = start(command, args, { cwd, env, onText: (text) => (all += text) })
  const { code, error } = await program.ended
  if (code === 0) return all
  if (speaksOfFullDisk(all))
    throw new CommandFailure(sentenceForFullDisk(cwd), { lines: program.lastLines() })
  const what = failure ?? `"${[command, ...args].join(' ')}" failed`
  throw new CommandFailure(error === undefined ? what : `${what}: ${error.message}`, {
    lines: program.lastLines(),
    cause: error,
  })
}

/**
 * Asks a program and its children to end, and ends them after the grace period.
 * @param {ReturnType<typeof start>} program
 * @param {{ graceMs: number }} options
 * @returns {Promise<boolean>} whether it went by itself
 */
export async function stop(program, { graceMs }) {
  if (program.pid === undefined) return true
  signalGroup(program.pid, 'SIGTERM')
  const went = await Promise.race([
    program.ended.then(() => true),
    new Promise((resolve) => setTimeout(resolve, graceMs, false).unref()),
  ])
  // Also after a clean end: a grandchild that ignored the first signal must not stay behind.
  signalGroup(program.pid, 'SIGKILL')
  await program.ended
  return went === true
}

/**
 * Ends everything that was started here at once and starts nothing more, for a command that is itself told to end.
 * @param {{ pid?: number }[]} [except] these are left to an orderly stop
 */
export function killAll(except = []) {
  closing = true
  for (const { pid } of running) {
    if (pid !== undefined && !except.some((program) => program.pid === pid)) signalGroup(pid, 'SIGKILL')
  }
}

/**
 * Signals a process group; one that is gone already is fine.
 * @param {number} pid leader of the group
 * @param {NodeJS.Signals} signal
 */
export function signalGroup(pid, signal) {
  try {
    process.kill(-pid, signal)
  } catch (error) {
    // ESRCH: nobody of that group is left, which is what a stop wants.
    if (!(error instanceof Error && 'code' in error && error.code === 'ESRCH')) throw error
  }
}
