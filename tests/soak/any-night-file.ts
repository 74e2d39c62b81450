/**
 * The properties of the reader of night files (any table in any dialect, any damage to it, any bytes) with three
 * thousand new files each. Run with `npx tsx tests/soak/any-night-file.ts`; a failure prints its seed.
 */
import { spawn } from 'node:child_process'
import { once } from 'node:events'

const program = spawn(
  'node_modules/.bin/vitest',
  ['run', '--project', 'unit', 'tests/unit/domain/night-files/any-'],
  { env: { ...process.env, NIGHT_FILE_RUNS: '3000', NODE_ENV: 'test' }, stdio: 'inherit' },
)
const [code] = (await once(program, 'exit')) as [number | null]
if (code !== 0) process.exitCode = 1
