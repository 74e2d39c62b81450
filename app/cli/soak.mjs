/** `npm run soak`: the long runs of tests/soak, each a program that ends with a status. All run, also when one fails. */
import { readdirSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { killAll, start } from './processes.mjs'
import { typescript } from './services.mjs'
import { stepLine } from './steps.mjs'

const root = dirname(dirname(dirname(fileURLToPath(import.meta.url))))

for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM'])) {
  process.once(signal, () => {
    killAll()
    process.exit(signal === 'SIGINT' ? 130 : 143)
  })
}

const files = readdirSync(join(root, 'tests', 'soak')).filter((name) => name.endsWith('.ts'))
let failed = 0
for (const file of files.sort()) {
  const started = performance.now()
  const { command, args } = typescript(join('tests', 'soak', file))
  const { code } = await start(command, args, { cwd: root, show: true }).ended
  if (code !== 0) failed += 1
  console.log(stepLine(file, code === 0 ? 'passed' : 'failed', performance.now() - started))
}
console.log(`${files.length - failed} passed, ${failed} failed`)
process.exitCode = failed === 0 ? 0 : 1
