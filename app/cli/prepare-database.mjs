/** Tables and demo data, brought up to date before anything uses them. */
import { existsSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { CommandFailure } from './failure.mjs'
import { run } from './processes.mjs'
import { typescript } from './services.mjs'

/**
 * Brings the tables up to date. A seeding that was cut off leaves a mark; on our own server its half-written demo data
 * are thrown away, which nobody can have worked with yet, and on another one a person has to decide.
 * @param {{ root: string, dataFolder: string, env: NodeJS.ProcessEnv, ours: boolean, say: (detail: string) => void }} options
 * @returns {Promise<{ empty: boolean }>} whether nothing has been put into the tables yet
 */
export async function migrate({ root, dataFolder, env, ours, say }) {
  const mark = markOf(dataFolder)
  const cutOff = existsSync(mark)
  if (cutOff && !ours) {
    const database = new URL(env.DATABASE_URL ?? '').pathname.slice(1)
    throw new CommandFailure(
      `Seeding was cut off half-way. Drop the database "${database}" and remove ${mark}, then start again.`,
    )
  }
  const failure = 'The tables could not be brought up to date'
  const said = await runTypescript({
    root,
    env,
    file: 'app/cli/migrate.ts',
    args: cutOff ? ['--afresh'] : [],
    failure,
  })
  rmSync(mark, { force: true })
  /** @type {{ applied: number, empty: boolean }} */
  const { applied, empty } = JSON.parse(said.trim().split('\n').at(-1) ?? '')
  const afresh = cutOff ? ', begun afresh after a seeding that was cut off' : ''
  say(applied === 0 ? 'up to date' : `${applied} migration${applied === 1 ? '' : 's'} applied${afresh}`)
  return { empty }
}

/**
 * Seeds an empty database in demo mode.
 * @param {{ root: string, dataFolder: string, env: NodeJS.ProcessEnv, demo: boolean, empty: boolean,
 *   say: (detail: string) => void }} options
 */
export async function ensureSeeded({ root, dataFolder, env, demo, empty, say }) {
  if (!demo) return say('none: DEMO is off')
  if (!empty) return say('present')
  const mark = markOf(dataFolder)
  writeFileSync(
    mark,
    'The demo data are being written. If this file is still here later, that was cut off.\n',
  )
  await runTypescript({ root, env, file: 'app/cli/seed.ts', failure: 'The demo data could not be written' })
  rmSync(mark)
  say('seeded')
}

/** @param {string} dataFolder */
function markOf(dataFolder) {
  return join(dataFolder, 'seeding')
}

/**
 * Runs one of the TypeScript commands; when it says one line and fails, that line is the sentence to show.
 * @param {{ root: string, env: NodeJS.ProcessEnv, file: string, args?: string[], failure: string }} options
 */
async function runTypescript({ root, env, file, args = [], failure }) {
  const node = typescript(file)
  try {
    return await run(node.command, [...node.args, ...args], { cwd: root, env, failure })
  } catch (error) {
    if (!(error instanceof CommandFailure) || error.lines.length !== 1) throw error
    throw new CommandFailure(error.lines[0] ?? failure, { cause: error })
  }
}
