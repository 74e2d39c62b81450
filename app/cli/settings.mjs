/** Settings of the start command: the environment, then the file .env, then defaults that suit a first look. */
import { existsSync } from 'node:fs'
import { createServer } from 'node:net'
import { join } from 'node:path'
import { CommandFailure } from './failure.mjs'

/**
 * @param {string} root
 * @returns {{ env: NodeJS.ProcessEnv, host: string, port: number, demo: boolean }}
 */
export function readSettings(root) {
  // Variables that are set already win over the file.
  if (existsSync(join(root, '.env'))) process.loadEnvFile(join(root, '.env'))
  const env = { ...process.env }
  // A variable set to nothing is one not set.
  for (const key of Object.keys(env)) if (env[key] === '') delete env[key]
  env.NODE_ENV ??= 'production'
  env.HOST ??= '127.0.0.1'
  env.PORT ??= '3000'
  env.DEMO ??= '1'
  const port = Number(env.PORT)
  if (!Number.isInteger(port) || port < 0 || port > 65535) {
    throw new CommandFailure(`PORT is "${env.PORT}"; expected a whole number from 0 to 65535.`)
  }
  return { env, host: env.HOST, port, demo: env.DEMO === '1' || env.DEMO === 'true' }
}

/**
 * Throws when the web server will not get its port, before anything takes time.
 * @param {string} host
 * @param {number} port
 * @returns {Promise<void>}
 */
export function checkPort(host, port) {
  return new Promise((resolve, reject) => {
    const probe = createServer()
    probe.on('error', (/** @type {NodeJS.ErrnoException} */ error) => {
      reject(new CommandFailure(portSentence(error.code, host, port), { cause: error }))
    })
    probe.listen(port, host, () => probe.close(() => resolve()))
  })
}

/** @param {string | undefined} code @param {string} host @param {number} port */
function portSentence(code, host, port) {
  if (code === 'EADDRINUSE') {
    return `Port ${port} on ${host} is in use by another program. Stop it, or take another port: PORT=${port + 1} npm start`
  }
  if (code === 'EACCES')
    return `Port ${port} may not be used by this user. Take one above 1023: PORT=3000 npm start`
  if (code === 'EADDRNOTAVAIL' || code === 'ENOTFOUND')
    return `This machine has no address ${host}. Correct HOST.`
  return `Port ${port} on ${host} cannot be used (${code ?? 'unknown fault'}).`
}
