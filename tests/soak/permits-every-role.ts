/**
 * Every state of a permit × every role × every page and act: what `npm test` tries in turns, here in full. Starts a
 * database server of its own; needs the build. Run with `npx tsx tests/soak/permits-every-role.ts`.
 */
import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { startOwnMariadb } from '#tests/support/own-mariadb.ts'

const server = await startOwnMariadb(['--innodb-buffer-pool-size=256M'])
try {
  const program = spawn(
    'node_modules/.bin/vitest',
    ['run', '--project', 'routes', 'tests/routes/permits-matrix.test.ts'],
    {
      env: { ...process.env, EVERY_ROLE: '1', TEST_DATABASE_URL: server.url('ebbline'), NODE_ENV: 'test' },
      stdio: 'inherit',
    },
  )
  const [code] = (await once(program, 'exit')) as [number | null]
  if (code !== 0) process.exitCode = 1
} finally {
  await server.end()
}
