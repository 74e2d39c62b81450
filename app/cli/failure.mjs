/** What stopped a command, in one sentence for the person at the keyboard; shown without a stack. */
export class CommandFailure extends Error {
  /**
   * @param {string} message one line: what was found, what to do
   * @param {{ lines?: string[], cause?: unknown }} [details] `lines`: the last words of the program that failed
   */
  constructor(message, { lines = [], cause } = {}) {
    super(message, { cause })
    this.name = 'CommandFailure'
    this.lines = lines
  }
}

/**
 * The sentence for anything that was thrown. Errors of the operating system that a person can mend get a plain one.
 * @param {unknown} error
 * @returns {string}
 */
export function sentenceFor(error) {
  if (error instanceof CommandFailure) return error.message
  if (!(error instanceof Error)) return String(error)
  const code = 'code' in error ? error.code : undefined
  const path = 'path' in error && typeof error.path === 'string' ? error.path : 'the project folder'
  if (code === 'ENOSPC') return sentenceForFullDisk(path)
  if (code === 'EDQUOT') return `The quota for ${path} is used up: free some space and start again.`
  if (code === 'EROFS') return `${path} is on a disk mounted read-only: Ebbline needs to write there.`
  if (code === 'EACCES') return `No permission for ${path}: start as a user who may write there.`
  return error.message
}

/** Whether a full disk is what a program's last lines complain about. */
export function speaksOfFullDisk(text) {
  return /no space left on device|errno: 28\b|errcode: 28\b|disk is full|ENOSPC/i.test(text)
}

/** @param {string} [path] something on that disk */
export function sentenceForFullDisk(path = 'the project') {
  return `The disk that holds ${path} is full: free some space and start again.`
}
