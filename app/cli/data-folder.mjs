/** What the product keeps on this machine, in the git-ignored folder data/: secrets, mail, and the database's files. */
import { createHash, randomBytes } from 'node:crypto'
import { chownSync, existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { canWriteIn } from './database-user.mjs'
import { CommandFailure } from './failure.mjs'

const ELSEWHERE = '/var/lib/ebbline'

/**
 * Makes data/ when it is missing.
 * @param {string} root the project
 */
export function ensureDataFolder(root) {
  const folder = join(root, 'data')
  // Others may pass through, because the database server runs as somebody else; what is secret in it is 0600 itself.
  mkdirSync(folder, { recursive: true, mode: 0o711 })
  return folder
}

/**
 * A secret of 64 hexadecimal digits, made at the first call and kept in a file that only we can read.
 * @param {string} path
 */
export function keptSecret(path) {
  if (existsSync(path)) {
    const kept = readFileSync(path, 'utf8').trim()
    if (/^[0-9a-f]{64}$/.test(kept)) return kept
    throw new CommandFailure(`${path} does not hold 64 hexadecimal digits. Remove it to have it made anew.`)
  }
  const made = randomBytes(32).toString('hex')
  writeFileSync(path, `${made}\n`, { mode: 0o600, flag: 'wx' })
  return made
}

/**
 * Where the database's files are, and as whom the server runs: in data/mariadb as the unprivileged user, or, when that
 * user cannot get there (a clone under /root, say), under /var/lib/ebbline; as root only when neither works.
 * @param {string} dataFolder
 * @param {import('./database-user.mjs').DatabaseUser} user
 * @returns {{ folder: string, user: import('./database-user.mjs').DatabaseUser, remark?: string }}
 */
export function placeForDatabase(dataFolder, user) {
  const noted = join(dataFolder, 'database-folder')
  // Relative to data/ when it is inside, so that the project can be moved.
  const known = existsSync(noted) ? resolve(dataFolder, readFileSync(noted, 'utf8').trim()) : undefined
  const inside = join(dataFolder, 'mariadb')
  if (known !== undefined) {
    // Never start on a second, empty set of files because the first cannot be reached today.
    if (!existsSync(known))
      throw new CommandFailure(`${known}, where ${noted} says the database is, is not there.`)
    if (canWriteIn(user, known)) return { folder: known, user }
    if (process.getuid?.() === 0) return { folder: known, user: root(), remark: ', as root' }
    throw new CommandFailure(`${known} belongs to another user: start as the user who started Ebbline first.`)
  }
  const hash = createHash('sha256').update(dataFolder).digest('hex').slice(0, 12)
  for (const folder of user.dropped ? [inside, join(ELSEWHERE, hash)] : [inside]) {
    if (!prepared(folder, user)) continue
    writeFileSync(noted, `${folder === inside ? 'mariadb' : folder}\n`)
    return { folder, user, remark: folder === inside ? undefined : `, files in ${folder}` }
  }
  mkdirSync(inside, { recursive: true, mode: 0o700 })
  if (!user.dropped) throw new CommandFailure(`No permission to write in ${inside}.`)
  chownSync(inside, 0, 0)
  writeFileSync(noted, 'mariadb\n')
  return { folder: inside, user: root(), remark: `, as root: ${user.name} can reach no folder` }
}

/** @param {string} folder @param {import('./database-user.mjs').DatabaseUser} user */
function prepared(folder, user) {
  mkdirSync(folder, { recursive: true, mode: 0o755 })
  if (user.dropped) chownSync(folder, user.uid, user.gid)
  return canWriteIn(user, folder)
}

function root() {
  return { name: 'root', uid: 0, gid: 0, dropped: false }
}
