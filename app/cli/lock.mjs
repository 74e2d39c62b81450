/** One start a project folder at a time, and no process left over from one that was killed. */
import { readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { CommandFailure } from './failure.mjs'
import { signalGroup } from './processes.mjs'

const LEFTOVERS_GO_WITHIN_MS = 8_000

/**
 * @typedef {{ pid: number, born: string }} Identity a process number is used again one day; with its birth it is one
 *   process for good
 * @typedef {Identity & { children: (Identity & { name: string })[], address?: string }} Holder
 */

/**
 * When a process was born, in clock ticks since the machine started; undefined when there is no such process.
 * @public asked for by name in a test
 * @param {number} pid
 */
export function birthOf(pid) {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8')
    // The name, in brackets, may hold spaces and brackets itself; field 22 is the 20th after it.
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
    // A zombie is dead: only its entry waits for its parent.
    return fields[0] === 'Z' ? undefined : fields[19]
  } catch (error) {
    if (error instanceof Error && 'code' in error && ['ENOENT', 'ESRCH'].includes(String(error.code)))
      return undefined
    throw error
  }
}

/**
 * Takes the lock of this folder, after ending what a killed start has left. Throws when a start is running.
 * @param {string} path of the lock file
 */
export async function takeLock(path) {
  /** @type {Holder} */
  const own = { pid: process.pid, born: birthOf(process.pid) ?? '', children: [] }
  let cleared = 0
  while (!tryWrite(path, own)) {
    const holder = readHolder(path)
    if (holder !== undefined) {
      if (isAlive(holder)) throw new CommandFailure(alreadyRunning(holder))
      cleared += await endLeftovers(holder)
    }
    rmSync(path, { force: true })
  }
  const rewrite = () => {
    writeFileSync(`${path}.new`, JSON.stringify(own))
    renameSync(`${path}.new`, path)
  }
  return {
    /** Processes of an earlier start that had to be ended. */
    cleared,
    /** Notes a child, so that the next start can end it should we be killed. */
    note(/** @type {string} */ name, /** @type {number | undefined} */ pid) {
      const born = pid === undefined ? undefined : birthOf(pid)
      if (pid === undefined || born === undefined) return
      own.children.push({ name, pid, born })
      rewrite()
    },
    /** Notes where the product answers, for the message to whoever starts it twice. */
    answersAt(/** @type {string} */ address) {
      own.address = address
      rewrite()
    },
    release: () => rmSync(path, { force: true }),
  }
}

/** @param {string} path @param {Holder} own */
function tryWrite(path, own) {
  try {
    writeFileSync(path, JSON.stringify(own), { flag: 'wx' })
    return true
  } catch (error) {
    if (error instanceof Error && 'code' in error && error.code === 'EEXIST') return false
    throw error
  }
}

/** @param {string} path @returns {Holder | undefined} undefined when the file is gone or was cut off while written */
function readHolder(path) {
  try {
    return JSON.parse(readFileSync(path, 'utf8'))
  } catch (error) {
    if (error instanceof SyntaxError) return undefined
    if (error instanceof Error && 'code' in error && error.code === 'ENOENT') return undefined
    throw error
  }
}

/** @param {Identity} identity */
function isAlive({ pid, born }) {
  return birthOf(pid) === born
}

/** @param {Holder} holder */
function alreadyRunning({ pid, address }) {
  const where = address === undefined ? '' : ` at ${address}`
  return `Ebbline is already running from this folder${where} (process ${pid}). Stop it first: kill ${pid}`
}

/** @param {Holder} holder */
async function endLeftovers(holder) {
  const leftovers = holder.children.filter(isAlive)
  for (const { pid } of leftovers) signalGroup(pid, 'SIGTERM')
  const giveUpAt = performance.now() + LEFTOVERS_GO_WITHIN_MS
  while (leftovers.some(isAlive) && performance.now() < giveUpAt) {
    await new Promise((resolve) => setTimeout(resolve, 50))
  }
  for (const leftover of leftovers) if (isAlive(leftover)) signalGroup(leftover.pid, 'SIGKILL')
  while (leftovers.some(isAlive)) await new Promise((resolve) => setTimeout(resolve, 50))
  return leftovers.length
}
