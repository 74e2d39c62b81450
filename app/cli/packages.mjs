/** What has to be installed before anything else can run: npm packages, and programs from the system's packages. */
import { existsSync, readFileSync } from 'node:fs'
import { delimiter, join } from 'node:path'
import { CommandFailure } from './failure.mjs'
import { run } from './processes.mjs'

/**
 * Whether what npm installed is what the lock file names: every locked package there (optional ones for other
 * systems aside) and of the locked version.
 * @public asked for by name in a test
 * @param {{ packages: Record<string, { version?: string, optional?: boolean, devOptional?: boolean, peer?: boolean }> }} lock package-lock.json
 * @param {{ packages: Record<string, { version?: string }> }} installed node_modules/.package-lock.json
 */
export function matchesLock(lock, installed) {
  return Object.entries(lock.packages).every(([path, wanted]) => {
    if (path === '') return true
    const found = installed.packages[path]
    if (found === undefined) return wanted.optional === true || wanted.devOptional === true
    return found.version === wanted.version
  })
}

/**
 * Runs `npm ci` when packages are missing or the lock file has moved on.
 * @param {string} root the project
 * @returns {Promise<string>} what was found or done
 */
export async function ensureNpmPackages(root) {
  const lock = JSON.parse(readFileSync(join(root, 'package-lock.json'), 'utf8'))
  // npm writes this file last, so that an interrupted install leaves none.
  const installedPath = join(root, 'node_modules', '.package-lock.json')
  if (existsSync(installedPath) && matchesLock(lock, JSON.parse(readFileSync(installedPath, 'utf8')))) {
    return 'as the lock file names them'
  }
  await run('npm', ['ci', '--include=dev', '--no-audit', '--no-fund'], {
    cwd: root,
    failure: 'npm could not install the packages of package-lock.json',
  })
  return 'installed'
}

/**
 * Full path of a program, also from the folders that only root's PATH holds; undefined when there is none.
 * @param {string} name
 */
export function findProgram(name) {
  const folders = [...(process.env.PATH ?? '').split(delimiter), '/usr/sbin', '/usr/local/sbin', '/usr/bin']
  return folders.map((folder) => join(folder, name)).find((path) => existsSync(path))
}

/**
 * Installs Debian packages when a program is missing and we may; otherwise says what to run.
 * @param {{ programs: string[], packages: string[], purpose: string }} wanted
 * @returns {Promise<string>}
 */
export async function ensureDebianPackages({ programs, packages, purpose }) {
  if (programs.every((name) => findProgram(name) !== undefined)) return 'present'
  const command = `apt-get install -y --no-install-recommends ${packages.join(' ')}`
  if (process.getuid?.() !== 0 || findProgram('apt-get') === undefined) {
    throw new CommandFailure(`${purpose} is not installed. Run this as root, then start again: ${command}`)
  }
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  const failure = `${purpose} could not be installed. Mend what apt complains about, or run: ${command}`
  await run('apt-get', ['update', '-q'], { env, failure })
  await run('apt-get', ['install', '-y', '-q', '--no-install-recommends', ...packages], { env, failure })
  const missing = programs.filter((name) => findProgram(name) === undefined)
  if (missing.length > 0) {
    throw new CommandFailure(
      `${purpose} was installed, but ${missing.join(' and ')} cannot be found in PATH.`,
    )
  }
  return `installed ${packages.join(', ')}`
}
