/** The suites of `npm test`, in the order in which they run. */
import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { ensureBuild } from './build-stamp.mjs'
import { runChecks } from './checks.mjs'
import { start } from './processes.mjs'
import { outcomeOf } from './report.mjs'

const HANGS_AFTER_MS = 12 * 60_000

/**
 * @typedef {object} Surroundings
 * @property {string} root the project
 * @property {string} folder for reports; removed at the end
 * @property {NodeJS.ProcessEnv} env with TEST_DATABASE_URL
 */

/**
 * @typedef {object} Suite
 * @property {string} name
 * @property {boolean} database whether it needs the database server
 * @property {boolean} [browser] whether it needs Chromium
 * @property {(surroundings: Surroundings) => Promise<import('./report.mjs').Outcome>} run
 */

/** @type {Suite[]} */
export const SUITES = [
  { name: 'validate', database: false, run: runValidate },
  { name: 'unit', database: false, run: vitest('unit', 'UTC') },
  { name: 'db', database: true, run: vitest('db*', 'UTC') },
  { name: 'build', database: false, run: build },
  { name: 'routes', database: true, run: vitest('routes', 'UTC') },
  { name: 'e2e', database: true, browser: true, run: vitest('e2e', 'UTC') },
  // Far from UTC and on the other side of the year: what leans on the machine's zone shows here.
  { name: 'unit-nz', database: false, run: vitest('unit', 'Pacific/Auckland') },
  { name: 'db-nz', database: true, run: vitest('db*', 'Pacific/Auckland') },
]

/** @type {Suite['run']} */
async function runValidate({ root }) {
  return { ...(await runChecks(root)), skipped: 0, notes: [] }
}

/** The production build counts as one test: route and browser tests rest on it. @type {Suite['run']} */
async function build({ root, env }) {
  await ensureBuild(root, env)
  return { passed: 1, failed: 0, skipped: 0, notes: [] }
}

/**
 * @param {string} project of vite.config.ts, or a pattern of such names
 * @param {string} zone
 * @returns {Suite['run']}
 */
function vitest(project, zone) {
  return async ({ root, folder, env }) => {
    const reportPath = join(folder, `${project.replace('*', '')}-${zone.replace('/', '-')}.json`)
    const args = [
      'run',
      '--project',
      project,
      '--reporter=default',
      '--reporter=json',
      `--outputFile.json=${reportPath}`,
    ]
    const program = start(join(root, 'node_modules', '.bin', 'vitest'), args, {
      cwd: root,
      // A death in the middle of the intake knows no zone: once is enough the second time round.
      env: { ...env, NODE_ENV: 'test', TZ: zone, ...(zone === 'UTC' ? {} : { FAULT_SEEDS: '1' }) },
      show: true,
    })
    const hung = setTimeout(() => program.child.kill('SIGKILL'), HANGS_AFTER_MS)
    const end = await program.ended
    clearTimeout(hung)
    return outcomeOf(existsSync(reportPath) ? JSON.parse(readFileSync(reportPath, 'utf8')) : undefined, end)
  }
}
