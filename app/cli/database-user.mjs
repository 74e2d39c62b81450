/** Whom the database server runs as. Never root when it can be helped. */
import { spawnSync } from 'node:child_process'
import { readFileSync } from 'node:fs'
import { userInfo } from 'node:os'
import { findProgram } from './packages.mjs'

const OWN_USER = 'ebbline-db'

/**
 * @typedef {{ name: string, uid: number, gid: number, dropped: boolean }} DatabaseUser
 *   dropped: we are root and the server is to run as somebody else
 */

/**
 * The user for the server: ourselves when we are not root; otherwise a system user of its own, made when missing;
 * otherwise `nobody`; and root only where the system has neither.
 * @returns {DatabaseUser}
 */
export function databaseUser() {
  const { uid, gid, username } = userInfo()
  if (uid !== 0) return { name: username, uid, gid, dropped: false }
  const own = lookUp(OWN_USER) ?? createOwnUser() ?? lookUp('nobody')
  return own === undefined ? { name: 'root', uid: 0, gid: 0, dropped: false } : { ...own, dropped: true }
}

/**
 * Whether a user may reach a folder and write in it. Asked by trying as that user, because the folders above count too.
 * @param {DatabaseUser} user
 * @param {string} folder
 */
export function canWriteIn(user, folder) {
  const identity = user.dropped ? { uid: user.uid, gid: user.gid } : {}
  return spawnSync('/usr/bin/test', ['-w', folder, '-a', '-x', folder], identity).status === 0
}

/**
 * @param {string} name
 * @returns {{ name: string, uid: number, gid: number } | undefined}
 */
function lookUp(name) {
  const line = readFileSync('/etc/passwd', 'utf8')
    .split('\n')
    .find((entry) => entry.startsWith(`${name}:`))
  if (line === undefined) return undefined
  const [, , uid, gid] = line.split(':')
  return { name, uid: Number(uid), gid: Number(gid) }
}

function createOwnUser() {
  const useradd = findProgram('useradd')
  if (useradd === undefined) return undefined
  const shell = '/usr/sbin/nologin'
  const made = spawnSync(useradd, [
    '--system',
    '--no-create-home',
    '--user-group',
    '--shell',
    shell,
    OWN_USER,
  ])
  // A system that refuses a new user (read-only /etc, a name service of its own) still has `nobody`.
  return made.status === 0 ? lookUp(OWN_USER) : undefined
}
