/** Receives one file from the disk as the web server does, and says how much memory that took at most. */
import { createReadStream, readFileSync, statSync } from 'node:fs'
import { closeDb, getDb } from '#app/db/client.server.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { NOW } from './night-file.ts'
import { peakMib } from './process-cost.ts'

const [, , path = '', fileName = '', personId = ''] = process.argv
const actor = { personId: Number(personId), name: 'bench', roles: ['technician'] as const }
const staged = await stageUpload(getDb(), actor, NOW, {
  sourceCode: 'NL-B',
  fileName,
  stream: createReadStream(path),
  statedBytes: statSync(path).size,
  limitBytes: 2 ** 40,
  largeBytes: 1024,
})
process.stdout.write(
  `${JSON.stringify({ importId: staged.importId, peakMib: peakMib(readFileSync('/proc/self/status', 'utf8')) })}\n`,
)
await closeDb()
