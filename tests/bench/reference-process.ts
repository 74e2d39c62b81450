/** The other side of the bench: a Python process that keeps its interpreter warm and answers one request at a time. */
import { execFileSync, spawn } from 'node:child_process'
import { createInterface } from 'node:readline'

export interface ReferenceAsk {
  case: 'B1' | 'C'
  cells: number
  rtol: number
  outputs: readonly number[]
}

export interface ReferenceAnswer {
  /** Seconds of the solution alone. */
  seconds: number
  /** By output, by node, Pa. */
  pressurePa: number[][]
}

export interface Reference {
  scipy: string
  ask(request: ReferenceAsk): Promise<ReferenceAnswer>
  close(): void
}

/** Starts the process; answers with the reason where Python or scipy are missing. */
export async function startReference(): Promise<Reference | { missing: string }> {
  try {
    execFileSync('python3', ['-c', 'import scipy'], { stdio: 'pipe' })
  } catch (error) {
    const said = (error as { stderr?: Buffer }).stderr?.toString().trim().split('\n').at(-1)
    return { missing: said || (error as Error).message }
  }
  const child = spawn('python3', [new URL('reference.py', import.meta.url).pathname], {
    stdio: ['pipe', 'pipe', 'inherit'],
  })
  const lines = createInterface({ input: child.stdout })[Symbol.asyncIterator]()
  const next = async (): Promise<unknown> => {
    const { value, done } = await lines.next()
    if (done) throw new Error('The Python process ended before it answered; its message stands above')
    return JSON.parse(value as string)
  }
  const { scipy } = (await next()) as { scipy: string }
  return {
    scipy,
    ask(request) {
      child.stdin.write(`${JSON.stringify(request)}\n`)
      return next() as Promise<ReferenceAnswer>
    },
    close() {
      child.stdin.end()
    },
  }
}
