/** Writes the files of the last three nights, and the copy that a hand made, into seeds/night-files. */
import { mkdirSync, writeFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { anyNightFile, LOGGER_CODES } from './readings/any-night.ts'
import { demoNights } from './readings/calendar.ts'
import { handExport } from './readings/hand-export.ts'

const folder = fileURLToPath(new URL('./night-files/', import.meta.url))
mkdirSync(folder, { recursive: true })
const nights = demoNights().slice(-3)
const files = nights.flatMap((night) => LOGGER_CODES.map((source) => anyNightFile(source, night)))
for (const file of [...files, handExport()]) {
  if (file === null) continue
  writeFileSync(`${folder}${file.fileName}`, file.bytes)
  console.log(`${file.fileName}: ${file.lineCount} lines, ${file.bytes.length} bytes`)
}
