/**
 * The tests that kill worker, web server and database in the middle of the log intake, with fifty seeds each, and those
 * that kill workers and trouble the mail server in the middle of mail, with a hundred. Starts a
 * database server of its own. Run with `npx tsx tests/soak/intake-faults.ts`; the web server's part needs the build.
 */
import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { startOwnMariadb } from '#tests/support/own-mariadb.ts'

const INTAKE = ['tests/db/faults-database', 'tests/db/faults-overlap', 'tests/db/faults-worker']
const SUITES = [
  { projects: ['db', 'db-own'], files: INTAKE, seeds: '50' },
  { projects: ['routes'], files: ['tests/routes/faults'], seeds: '50' },
  { projects: ['db'], files: ['tests/db/faults-mail'], seeds: '100' },
]

const server = await startOwnMariadb(['--innodb-buffer-pool-size=256M'])
try {
  for (const { projects, files, seeds } of SUITES) {
    const named = projects.flatMap((project) => ['--project', project])
    const program = spawn('node_modules/.bin/vitest', ['run', ...named, ...files], {
      env: { ...process.env, FAULT_SEEDS: seeds, TEST_DATABASE_URL: server.url('ebbline'), NODE_ENV: 'test' },
      stdio: 'inherit',
    })
    const [code] = (await once(program, 'exit')) as [number | null]
    if (code !== 0) process.exitCode = 1
  }
} finally {
  await server.end()
}
