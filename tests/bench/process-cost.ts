/** What another process has cost so far, as Linux keeps account of it. */
import { readFileSync } from 'node:fs'

/** Most memory that was ever in use, MiB, out of the text of /proc/<pid>/status. */
export function peakMib(status: string): number {
  const found = /^VmHWM:\s+(\d+) kB$/m.exec(status)?.[1]
  if (found === undefined) throw new Error('The system does not say how much memory a process has used.')
  return Number(found) / 1024
}

/** The same for a running process. */
export function peakMibOf(pid: number): number {
  return peakMib(readFileSync(`/proc/${pid}/status`, 'utf8'))
}

/** Processor time so far, s. Linux counts it in hundredths for programs, whatever its own clock does (proc(5)). */
export function cpuSecondsOf(pid: number): number {
  const stat = readFileSync(`/proc/${pid}/stat`, 'utf8')
  // The second field is the program's name, in brackets and with any letters; what follows is numbers.
  const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ')
  return (Number(fields[11]) + Number(fields[12])) / 100
}
