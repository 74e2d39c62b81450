/** The four checks of `npm run validate`: each is an npm script of its own, and each counts as one test. */
import { start } from './processes.mjs'
import { stepLine } from './steps.mjs'

const CHECKS = [
  { script: 'typecheck', name: 'types' },
  { script: 'lint', name: 'lint' },
  { script: 'unused', name: 'unused code' },
  { script: 'drift', name: 'migrations' },
]

/**
 * Runs all four, also when one fails, and prints a line for each; the words of a failed one come above its line.
 * @param {string} root
 * @returns {Promise<{ passed: number, failed: number }>}
 */
export async function runChecks(root) {
  let failed = 0
  for (const { script, name } of CHECKS) {
    const started = performance.now()
    let words = ''
    const program = start('npm', ['run', '--silent', script], {
      cwd: root,
      onText: (text) => (words += text),
    })
    const { code } = await program.ended
    if (code !== 0) {
      failed += 1
      console.log(words.trimEnd())
    }
    console.log(
      stepLine(name, code === 0 ? 'passed' : `failed ("npm run ${script}")`, performance.now() - started),
    )
  }
  return { passed: CHECKS.length - failed, failed }
}
