/** `npm run validate`: types, lint and format, unused code, schema against migrations. */
import { dirname } from 'node:path'
import { fileURLToPath } from 'node:url'
import { runChecks } from './checks.mjs'

const root = dirname(dirname(dirname(fileURLToPath(import.meta.url))))
const { failed } = await runChecks(root)
process.exitCode = failed === 0 ? 0 : 1
