/** One start a folder, and nothing left over from a start that was killed. */
import { spawn } from 'node:child_process'
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeAll, beforeEach, expect, test, vi } from 'vitest'

interface Lock {
  cleared: number
  note(name: string, pid: number | undefined): void
  answersAt(address: string): void
  release(): void
}
let takeLock: (path: string) => Promise<Lock>
let birthOf: (pid: number) => string | undefined
let folder: string
let path: string

beforeAll(async () => {
  ;({ takeLock, birthOf } = await vi.importActual<{ takeLock: typeof takeLock; birthOf: typeof birthOf }>(
    '#app/cli/lock.mjs',
  ))
})
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'ebbline-lock-'))
  path = join(folder, 'running.json')
})
afterEach(() => rmSync(folder, { recursive: true }))

/** A program that runs for a minute, in a process group of its own as the start command's children are. */
function sleeper(): number {
  const child = spawn('sleep', ['60'], { detached: true, stdio: 'ignore' })
  child.unref()
  return child.pid ?? 0
}

/** A lock as left by a start whose process is gone. */
function leaveBehind(children: { name: string; pid: number; born: string | undefined }[]): void {
  writeFileSync(path, JSON.stringify({ pid: 2 ** 22 - 1, born: '1', children }))
}

test('a second start is told where the first one runs', async () => {
  const lock = await takeLock(path)
  lock.answersAt('http://127.0.0.1:3000')
  await expect(takeLock(path)).rejects.toThrow(
    `already running from this folder at http://127.0.0.1:3000 (process ${process.pid})`,
  )
  lock.release()
  expect(existsSync(path)).toBe(false)
})

test('processes of a killed start are ended', async () => {
  const pid = sleeper()
  leaveBehind([{ name: 'worker', pid, born: birthOf(pid) }])
  const lock = await takeLock(path)
  expect(lock.cleared).toBe(1)
  expect(birthOf(pid)).toBeUndefined()
  expect(JSON.parse(readFileSync(path, 'utf8'))).toMatchObject({ pid: process.pid, children: [] })
})

test('a process that only has the number of an old one is left alone', async () => {
  const pid = sleeper()
  leaveBehind([{ name: 'worker', pid, born: '1' }])
  const lock = await takeLock(path)
  expect(lock.cleared).toBe(0)
  expect(birthOf(pid)).toBeDefined()
  process.kill(pid)
})

test('a lock file cut off while it was written does not block', async () => {
  writeFileSync(path, '{"pid": 12')
  const lock = await takeLock(path)
  expect(lock.cleared).toBe(0)
  lock.release()
})

test('children noted are in the file, so that the next start finds them', async () => {
  const pid = sleeper()
  const lock = await takeLock(path)
  lock.note('database', pid)
  lock.note('never started', undefined)
  expect(JSON.parse(readFileSync(path, 'utf8')).children).toEqual([
    { name: 'database', pid, born: birthOf(pid) },
  ])
  process.kill(pid)
})
