/** Lines like "database     ready on 127.0.0.1:40123                       1.2 s", one a step. */
import { isClosing } from './processes.mjs'

const NAME_WIDTH = 12
const DETAIL_WIDTH = 62
const SILENCE_MS = 4_000

/**
 * One finished line.
 * @param {string} name
 * @param {string} detail
 * @param {number} [elapsedMs]
 */
export function stepLine(name, detail, elapsedMs) {
  const time = elapsedMs === undefined ? '' : `${(elapsedMs / 1000).toFixed(1)} s`.padStart(9)
  return `${name.padEnd(NAME_WIDTH)} ${detail.padEnd(time === '' ? 0 : DETAIL_WIDTH)}${time}`
}

/**
 * Runs one step and prints its line when it is done. A step that stays silent for four seconds says what it is at,
 * so that nobody wonders whether anything happens.
 * @template Result
 * @param {string} name
 * @param {string} doing shown while it runs: "installing packages"
 * @param {(say: (detail: string) => void) => Promise<Result>} work calls `say` with what the finished line reads
 * @returns {Promise<Result>}
 */
export async function step(name, doing, work) {
  const started = performance.now()
  let detail = 'done'
  const waiting = setTimeout(() => console.log(stepLine(name, `${doing} …`)), SILENCE_MS)
  try {
    const result = await work((text) => {
      detail = text
    })
    console.log(stepLine(name, detail, performance.now() - started))
    return result
  } catch (error) {
    if (!isClosing()) console.log(stepLine(name, 'failed', performance.now() - started))
    throw error
  } finally {
    clearTimeout(waiting)
  }
}
