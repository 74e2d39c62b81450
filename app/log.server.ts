/** One line a message, as JSON, on standard output or error: the only place that uses the console. */
import { env } from './env.server.ts'

const LEVELS = ['debug', 'info', 'warn', 'error', 'silent'] as const
type Level = Exclude<(typeof LEVELS)[number], 'silent'>

function write(level: Level, message: string, facts: Record<string, unknown>): void {
  if (LEVELS.indexOf(level) < LEVELS.indexOf(env().LOG_LEVEL)) return
  const line = JSON.stringify({ level, message, ...facts }, (_key, value: unknown) =>
    value instanceof Error ? describeError(value) : value,
  )
  if (level === 'error' || level === 'warn') console.error(line)
  else console.log(line)
}

/** An error with its causes, without the noise of class instances. */
function describeError(error: Error): Record<string, unknown> {
  return {
    name: error.name,
    message: error.message,
    stack: error.stack,
    ...(error.cause instanceof Error ? { cause: describeError(error.cause) } : {}),
  }
}

export const log = {
  debug: (message: string, facts: Record<string, unknown> = {}) => write('debug', message, facts),
  info: (message: string, facts: Record<string, unknown> = {}) => write('info', message, facts),
  warn: (message: string, facts: Record<string, unknown> = {}) => write('warn', message, facts),
  error: (message: string, facts: Record<string, unknown> = {}) => write('error', message, facts),
}
