/** Whether the build belongs to the sources as they are now. */
import { createHash } from 'node:crypto'
import { existsSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { run } from './processes.mjs'

/** Folders and files that the build is made from. */
const SOURCES = [
  'app',
  'public',
  'seeds',
  'package-lock.json',
  'tsconfig.json',
  'vite.config.ts',
  'react-router.config.ts',
]
const COUNTS = /\.(ts|tsx|css|svg|json|ico|png|webmanifest|woff2)$/

/**
 * One hash over the names and contents of all sources.
 * @public asked for by name in a test
 * @param {string} root
 */
export function hashSources(root) {
  const hash = createHash('sha256')
  for (const source of SOURCES) {
    if (!existsSync(join(root, source))) continue
    for (const path of filesUnder(root, source))
      hash
        .update(`${path}\0`)
        .update(readFileSync(join(root, path)))
        .update('\0')
  }
  return hash.digest('hex')
}

/**
 * Builds when there is no build or the sources have changed since.
 * @param {string} root
 * @param {NodeJS.ProcessEnv} env
 * @returns {Promise<string>}
 */
export async function ensureBuild(root, env) {
  const stamp = join(root, 'build', '.sources')
  const wanted = hashSources(root)
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === wanted) return 'up to date'
  // First, so that a build cut off half-way is not taken for a whole one.
  rmSync(stamp, { force: true })
  const program = join(root, 'node_modules', '.bin', 'react-router')
  await run(program, ['build'], {
    cwd: root,
    env: { ...env, NODE_ENV: 'production' },
    failure: 'The build failed',
  })
  writeFileSync(stamp, wanted)
  return 'built'
}

/** @param {string} root @param {string} path a file or a folder @returns {string[]} sorted, relative to root */
function filesUnder(root, path) {
  if (!statSync(join(root, path)).isDirectory()) return [path]
  return readdirSync(join(root, path), { withFileTypes: true })
    .flatMap((entry) => {
      const inner = join(path, entry.name)
      if (entry.isDirectory()) return filesUnder(root, inner)
      return COUNTS.test(entry.name) ? [inner] : []
    })
    .sort()
}
