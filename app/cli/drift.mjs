/** Fails when the tables in app/db/schema and the migrations in drizzle/ have grown apart. */
import { cpSync, mkdtempSync, readdirSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join, relative } from 'node:path'
import { fileURLToPath } from 'node:url'
import { CommandFailure, sentenceFor } from './failure.mjs'
import { run } from './processes.mjs'

const root = dirname(dirname(dirname(fileURLToPath(import.meta.url))))

/** Asks drizzle-kit for the next migration beside a copy of the present ones; there must be none. */
async function findDrift() {
  const folder = mkdtempSync(join(tmpdir(), 'ebbline-drift-'))
  try {
    const copy = join(folder, 'drizzle')
    cpSync(join(root, 'drizzle'), copy, { recursive: true })
    const before = readdirSync(copy).length
    const program = join(root, 'node_modules', '.bin', 'drizzle-kit')
    // The tool takes an absolute folder for a relative one.
    const out = relative(root, copy)
    const args = ['generate', '--dialect', 'mysql', '--schema', './app/db/schema/index.ts', '--out', out]
    const said = await run(program, args, { cwd: root, failure: 'drizzle-kit could not read the schema' })
    if (readdirSync(copy).length !== before || !said.includes('No schema changes')) {
      throw new CommandFailure(
        'The schema has changes without a migration: run "npm run db:generate" and commit it.',
        {
          lines: said.split('\n'),
        },
      )
    }
  } finally {
    rmSync(folder, { recursive: true })
  }
}

try {
  await findDrift()
  console.log('The migrations hold every change of the schema.')
} catch (error) {
  console.error(sentenceFor(error))
  if (error instanceof CommandFailure) console.error(error.lines.join('\n'))
  process.exitCode = 1
}
