/** A large night file against a small one: the product's worker reads both, and we look at its processor time and memory. */
import { spawnSync } from 'node:child_process'
import { once } from 'node:events'
import { createWriteStream, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { pipeline } from 'node:stream/promises'
import { eq } from 'drizzle-orm'
import { getDb } from '#app/db/client.server.ts'
import { importFile } from '#app/db/schema/index.ts'
import { processes, services } from '#tests/support/programs.ts'
import { linesFor, nightFile, START_MS } from './night-file.ts'
import { cpuSecondsOf, peakMibOf } from './process-cost.ts'

const MIB = 1024 * 1024
const SMALL = 5 * MIB
/** The first lets the just-in-time compiler have its say and is not counted. */
const SMALL_RUNS = 4
const YEAR_MS = 365 * 86_400_000

interface Run {
  lines: number
  cpuSeconds: number
}

function median(values: readonly number[]): number {
  return values.toSorted((a, b) => a - b)[values.length >> 1] ?? Number.NaN
}

/** Reads the files one after another in one worker, and prints what each cost. */
export async function benchLarge(personId: number, largeMib: number): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'ebbline-bench-'))
  const { start, stop } = await processes()
  const { typescript } = await services()
  const { command, args } = typescript('app/worker/main.ts')
  const worker = start(command, args, { channel: true })
  try {
    await once(worker.child, 'message')
    const pid = worker.pid ?? 0
    const idle = peakMibOf(pid)
    const small: Run[] = []
    for (let run = 0; run < SMALL_RUNS; run += 1) {
      const { path, lines } = await write(folder, SMALL, START_MS - (2 + run) * YEAR_MS)
      await receive(path, `small-${run}.csv`, personId)
      small.push({ lines, cpuSeconds: await readByWorker(pid, `small-${run}.csv`, lines) })
    }
    const smallPeak = peakMibOf(pid)
    const { path, lines } = await write(folder, largeMib * MIB, START_MS - YEAR_MS)
    const receiving = await receive(path, 'large.csv', personId)
    const cpuSeconds = await readByWorker(pid, 'large.csv', lines)
    report(small.slice(1), { lines, cpuSeconds }, { idle, smallPeak, receiving, peak: peakMibOf(pid) })
  } finally {
    await stop(worker, { graceMs: 5_000 })
    rmSync(folder, { recursive: true })
  }
}

async function write(
  folder: string,
  bytes: number,
  startMs: number,
): Promise<{ path: string; lines: number }> {
  const lines = linesFor(bytes)
  const path = join(folder, 'night.csv')
  await pipeline(nightFile(startMs, lines), createWriteStream(path))
  return { path, lines }
}

/** @returns the peak memory of the process that received it, MiB */
async function receive(path: string, fileName: string, personId: number): Promise<number> {
  const { command, args } = (await services()).typescript('tests/bench/receive-process.ts')
  const { stdout, status, stderr } = spawnSync(command, [...args, path, fileName, String(personId)], {
    encoding: 'utf8',
  })
  if (status !== 0) throw new Error(stderr)
  return (JSON.parse(stdout) as { peakMib: number }).peakMib
}

/** Waits until the worker has read a file. @returns the processor time of that, s */
async function readByWorker(pid: number, fileName: string, lines: number): Promise<number> {
  const before = cpuSecondsOf(pid)
  for (;;) {
    const [row] = await getDb()
      .select({ state: importFile.state, lineCount: importFile.lineCount, fault: importFile.fault })
      .from(importFile)
      .where(eq(importFile.fileName, fileName))
    if (row?.state === 'read' && row.lineCount === lines + 1) return cpuSecondsOf(pid) - before
    if (row?.state !== 'reading' || row.fault !== '')
      throw new Error(
        `${fileName} was not read: it is ${row?.state} with ${row?.lineCount} lines. ${row?.fault}`,
      )
    await new Promise((resolve) => setTimeout(resolve, 200))
  }
}

function report(
  small: readonly Run[],
  large: Run,
  memory: { idle: number; smallPeak: number; receiving: number; peak: number },
): void {
  const smallCost = median(small.map(({ lines, cpuSeconds }) => cpuSeconds / lines))
  const largeCost = large.cpuSeconds / large.lines
  const ratio = largeCost / smallCost
  const mib = Math.round((large.lines / linesFor(MIB)) * 10) / 10
  console.log(`\nA file of ${mib} MiB (${large.lines} lines) against one of 5 MiB, read by the worker`)
  console.log(
    `  processor time by line ${(1e6 * smallCost).toFixed(1)} µs small, ${(1e6 * largeCost).toFixed(1)} µs large`,
  )
  console.log(`  ratio ${ratio.toFixed(2)}, asked for at most 1.5: ${ratio <= 1.5 ? 'met' : 'MISSED'}`)
  console.log(
    `  peak memory ${memory.peak.toFixed(0)} MiB (idle ${memory.idle.toFixed(0)}, small files ${memory.smallPeak.toFixed(0)}), ` +
      `asked for at most 300 MB: ${memory.peak * MIB <= 300e6 ? 'met' : 'MISSED'}`,
  )
  console.log(
    `  receiving it took at most ${memory.receiving.toFixed(0)} MiB: ${memory.receiving * MIB <= 300e6 ? 'met' : 'MISSED'}`,
  )
}
