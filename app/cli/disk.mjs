/** Room on disks. */
import { statfsSync } from 'node:fs'

/**
 * Bytes that an ordinary user may still write on the disk that holds a folder.
 * @param {string} folder
 */
export function freeBytes(folder) {
  const { bavail, bsize } = statfsSync(folder)
  return bavail * bsize
}
