/**
 * `npm test`: everything, from nothing. Brings what is missing, starts a database of its own in a temporary folder,
 * runs every suite even when one fails, and ends with "N passed, N failed". `npm test -- unit db` runs some.
 */
import { randomBytes } from 'node:crypto'
import { chmodSync, existsSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { databaseUser } from './database-user.mjs'
import { freeBytes } from './disk.mjs'
import { CommandFailure, sentenceFor } from './failure.mjs'
import { DATABASE_PACKAGES, startMariadb } from './mariadb.mjs'
import { ensureDebianPackages, ensureNpmPackages } from './packages.mjs'
import { killAll } from './processes.mjs'
import { outcomeWords } from './report.mjs'
import { step, stepLine } from './steps.mjs'
import { SUITES } from './suites.mjs'

const BROWSER_PACKAGES = { programs: ['chromium'], packages: ['chromium'], purpose: 'The browser Chromium' }
const ROOM_IN_MEMORY = 3 * 2 ** 30
const root = dirname(dirname(dirname(fileURLToPath(import.meta.url))))

/** Suites named on the command line, or all. */
function chosenSuites(/** @type {string[]} */ names) {
  const unknown = names.filter((name) => !SUITES.some((suite) => suite.name === name))
  if (unknown.length > 0) {
    const known = SUITES.map((suite) => suite.name).join(', ')
    throw new CommandFailure(`There is no suite "${unknown.join('", "')}"; there are ${known}.`)
  }
  return names.length === 0 ? SUITES : SUITES.filter((suite) => names.includes(suite.name))
}

/** In memory where there is room, because tests write and throw away. */
function temporaryFolder() {
  // In a container /dev/shm is often there with 64 MiB only.
  const roomy = existsSync('/dev/shm') && freeBytes('/dev/shm') > ROOM_IN_MEMORY
  const folder = mkdtempSync(join(roomy ? '/dev/shm' : tmpdir(), 'ebbline-test-'))
  // The server's user has to get through to the folder below this one.
  chmodSync(folder, 0o711)
  return folder
}

/** @param {string} folder */
async function startTestDatabase(folder) {
  return await startMariadb({
    folder: mkdtempSync(join(folder, 'database-')),
    user: databaseUser(),
    password: randomBytes(16).toString('hex'),
    options: [
      '--innodb-flush-log-at-trx-commit=0',
      '--innodb-doublewrite=0',
      '--innodb-buffer-pool-size=256M',
    ],
  })
}

/**
 * @param {import('./suites.mjs').Suite} suite
 * @param {import('./suites.mjs').Surroundings} surroundings
 */
async function runSuite(suite, surroundings) {
  const started = performance.now()
  console.log(`\n── ${suite.name} ${'─'.repeat(Math.max(0, 80 - suite.name.length))}`)
  /** @type {import('./report.mjs').Outcome} */
  let outcome
  try {
    outcome = await suite.run(surroundings)
  } catch (error) {
    if (error instanceof CommandFailure) console.log(error.lines.join('\n'))
    outcome = { passed: 0, failed: 1, skipped: 0, notes: [sentenceFor(error)] }
  }
  const elapsed = performance.now() - started
  console.log(stepLine(suite.name, outcomeWords(outcome), elapsed))
  return { suite, outcome, elapsed }
}

async function main() {
  const started = performance.now()
  const suites = chosenSuites(process.argv.slice(2))
  await step('packages', 'installing npm packages', async (say) => say(await ensureNpmPackages(root)))
  const folder = temporaryFolder()
  /** @type {Awaited<ReturnType<typeof startMariadb>> | undefined} */
  let database
  try {
    const env = { ...process.env }
    delete env.DATABASE_URL
    if (suites.some((suite) => suite.database)) {
      database = await step('database', 'starting a server for the tests', async (say) => {
        await ensureDebianPackages(DATABASE_PACKAGES)
        const server = await startTestDatabase(folder)
        say(`ready on 127.0.0.1:${server.port}, in ${folder}`)
        return server
      })
      env.TEST_DATABASE_URL = database.url('ebbline')
    }
    if (suites.some((suite) => suite.browser)) {
      await step('browser', 'installing Chromium', async (say) =>
        say(await ensureDebianPackages(BROWSER_PACKAGES)),
      )
    }
    const results = []
    for (const suite of suites) results.push(await runSuite(suite, { root, folder, env }))
    return { results, elapsed: performance.now() - started }
  } finally {
    await database?.stop()
    rmSync(folder, { recursive: true, force: true })
  }
}

for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM', 'SIGHUP'])) {
  process.once(signal, () => {
    killAll()
    console.error(`Stopped by ${signal}: the run is not complete.`)
    process.exit(signal === 'SIGINT' ? 130 : 143)
  })
}

try {
  const { results, elapsed } = await main()
  console.log('')
  for (const result of results)
    console.log(stepLine(result.suite.name, outcomeWords(result.outcome), result.elapsed))
  console.log(stepLine('all', '', elapsed))
  const sum = (/** @type {'passed' | 'failed'} */ key) =>
    results.reduce((total, { outcome }) => total + outcome[key], 0)
  process.exitCode = sum('failed') === 0 ? 0 : 1
  console.log(`${sum('passed')} passed, ${sum('failed')} failed`)
} catch (error) {
  console.error(`The tests could not be run: ${sentenceFor(error)}`)
  if (error instanceof CommandFailure && error.lines.length > 0) console.error(error.lines.join('\n'))
  process.exitCode = 1
  console.log('0 passed, 1 failed')
}
