/** The product's launcher, which is plain JavaScript, with the types that tests and benches need of it. */
import type { ChildProcess } from 'node:child_process'
import { pathToFileURL } from 'node:url'

export interface Program {
  child: ChildProcess
  pid?: number
  ended: Promise<{ code: number | null }>
}

/** One of the files of app/cli. */
export async function launcher<Module>(file: string): Promise<Module> {
  return (await import(/* @vite-ignore */ pathToFileURL(`${process.cwd()}/app/cli/${file}`).href)) as Module
}

interface Processes {
  start(
    command: string,
    args: readonly string[],
    options?: { channel?: boolean; env?: NodeJS.ProcessEnv },
  ): Program
  stop(program: Program, options: { graceMs: number }): Promise<void>
}

interface Services {
  typescript(file: string): { command: string; args: string[] }
}

/** Starting and stopping programs. */
export const processes = () => launcher<Processes>('processes.mjs')

/** How the product's TypeScript programs are run. */
export const services = () => launcher<Services>('services.mjs')
