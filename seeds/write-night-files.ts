/** Writes the night files of the last three nights into seeds/night-files: `npx tsx seeds/write-night-files.ts`. */
import { mkdirSync, writeFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { demoNights, nightFile } from './readings/night-file.ts'

const folder = fileURLToPath(new URL('./night-files/', import.meta.url))
mkdirSync(folder, { recursive: true })
for (const night of demoNights().slice(-3)) {
  for (const source of ['NL-W', 'NL-E'] as const) {
    const { fileName, bytes, lineCount } = nightFile(source, night)
    writeFileSync(`${folder}${fileName}`, bytes)
    console.log(`${fileName}: ${lineCount} lines, ${bytes.length} bytes`)
  }
}
