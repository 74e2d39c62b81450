/** Tables and demo data, brought up to date before anything uses them. */
import { CommandFailure } from './failure.mjs'
import { run } from './processes.mjs'
import { typescript } from './services.mjs'

/**
 * Brings the tables up to date.
 * @param {{ root: string, env: NodeJS.ProcessEnv, say: (detail: string) => void }} options
 * @returns {Promise<{ empty: boolean }>} whether there is no site yet
 */
export async function migrate({ root, env, say }) {
  const failure = 'The tables could not be brought up to date'
  const said = await runTypescript({ root, env, file: 'app/cli/migrate.ts', failure })
  /** @type {{ applied: number, empty: boolean }} */
  const { applied, empty } = JSON.parse(said.trim().split('\n').at(-1) ?? '')
  say(applied === 0 ? 'up to date' : `${applied} migration${applied === 1 ? '' : 's'} applied`)
  return { empty }
}

/**
 * Seeds an empty database in demo mode.
 * @param {{ root: string, env: NodeJS.ProcessEnv, demo: boolean, empty: boolean, say: (detail: string) => void }} options
 */
export async function ensureSeeded({ root, env, demo, empty, say }) {
  if (!demo) return say('none: DEMO is off')
  if (!empty) return say('present')
  await runTypescript({ root, env, file: 'app/cli/seed.ts', failure: 'The demo data could not be written' })
  say('seeded')
}

/**
 * Runs one of the TypeScript commands; when it says one line and fails, that line is the sentence to show.
 * @param {{ root: string, env: NodeJS.ProcessEnv, file: string, failure: string }} options
 */
async function runTypescript({ root, env, file, failure }) {
  const { command, args } = typescript(file)
  try {
    return await run(command, args, { cwd: root, env, failure })
  } catch (error) {
    if (!(error instanceof CommandFailure) || error.lines.length !== 1) throw error
    throw new CommandFailure(error.lines[0] ?? failure, { cause: error })
  }
}
