/**
 * The tests that kill worker, web server and database in the middle of the log intake, with fifty seeds each. Starts a
 * database server of its own. Run with `npx tsx tests/soak/intake-faults.ts`; the web server's part needs the build.
 */
import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { startOwnMariadb } from '#tests/support/own-mariadb.ts'

const SEEDS = '50'
const SUITES = [
  ['db', 'tests/db/faults-'],
  ['routes', 'tests/routes/faults'],
] as const

const server = await startOwnMariadb(['--innodb-buffer-pool-size=256M'])
try {
  for (const [project, files] of SUITES) {
    const program = spawn('node_modules/.bin/vitest', ['run', '--project', project, files], {
      env: { ...process.env, FAULT_SEEDS: SEEDS, TEST_DATABASE_URL: server.url('ebbline'), NODE_ENV: 'test' },
      stdio: 'inherit',
    })
    const [code] = (await once(program, 'exit')) as [number | null]
    if (code !== 0) process.exitCode = 1
  }
} finally {
  await server.end()
}
