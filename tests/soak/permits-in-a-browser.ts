/**
 * The browser tests of permits that take minutes: a permit's form, and stopping, resuming, running out, handing back and
 * bad air on a demo of their own. Starts a database server of its own; needs the build and Chromium.
 */
import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { startOwnMariadb } from '#tests/support/own-mariadb.ts'

const server = await startOwnMariadb(['--innodb-buffer-pool-size=256M'])
try {
  const program = spawn('node_modules/.bin/vitest', ['run', '--project', 'e2e-long'], {
    env: { ...process.env, TEST_DATABASE_URL: server.url('ebbline'), NODE_ENV: 'test' },
    stdio: 'inherit',
  })
  const [code] = (await once(program, 'exit')) as [number | null]
  if (code !== 0) process.exitCode = 1
} finally {
  await server.end()
}
